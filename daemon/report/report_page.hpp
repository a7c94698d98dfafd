#pragma once
// The agreement record as one page that needs nothing beside it: style inside, no script, no link to
// anywhere.
#include <string>
#include <vector>

#include "daemon/render/page_figure.hpp"
#include "daemon/render/page_scene.hpp"
#include "daemon/report/period_record.hpp"

namespace agreed {

/// `tables`: names of the files written beside it, to be named in it.
[[nodiscard]] std::string report_page(const PeriodRecord& record, const std::vector<std::string>& tables);

// Its parts.
/// The verdict over the period as a step line.
[[nodiscard]] Figure verdicts_figure(const ComparisonScene& scene, const ComparisonCourse& course,
                                     const ReportPeriod& period);
/// "agreement shown 96 % of the time, ...".
[[nodiscard]] std::string verdict_shares(const ComparisonCourse& course);
/// The bias at every level as it stood with the last pair of each day.
[[nodiscard]] DataTable days_table(const ComparisonScene& scene, const ComparisonCourse& course);
[[nodiscard]] DataTable verdicts_table(const ComparisonCourse& course);
[[nodiscard]] DataTable alerts_table(const PeriodRecord& record);
[[nodiscard]] DataTable interventions_table(const PeriodRecord& record);
/// Files of which something was rejected.
[[nodiscard]] DataTable rejected_files_table(const PeriodRecord& record);
/// The first 200 rejected rows.
[[nodiscard]] DataTable rejected_rows_table(const PeriodRecord& record);
[[nodiscard]] DataTable configurations_table(const PeriodRecord& record);

}  // namespace agreed
