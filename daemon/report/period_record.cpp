#include "daemon/report/period_record.hpp"

#include <algorithm>
#include <utility>

#include "daemon/render/alert_json.hpp"
#include "daemon/sha256.hpp"

namespace agreed {
namespace {

/// Those of them in use between the period's beginning and its end.
std::vector<RecordedConfiguration> in_use(std::vector<RecordedConfiguration> all,
                                          const ReportPeriod& period) {
  std::erase_if(all, [&](const RecordedConfiguration& used) { return used.at >= period.to; });
  auto first = all.end();
  while (first != all.begin() && (first == all.end() || first->at > period.from)) --first;
  all.erase(all.begin(), first);
  const auto same = [](const RecordedConfiguration& a, const RecordedConfiguration& b) {
    return a.sha256 == b.sha256;  // recorded at every start
  };
  all.erase(std::unique(all.begin(), all.end(), same), all.end());
  return all;
}

Snapshot snapshot_of(const Config& config, const PeriodCourse& course, const ReportPeriod& period) {
  Snapshot snapshot;
  snapshot.at = period.to;
  snapshot.settings = config.settings;
  snapshot.started = snapshot.ready = true;
  for (const ChartCourse& chart : course.charts) {
    snapshot.charts.emplace_back(std::make_shared<const ChartView>(chart.end));
    snapshot.chart_states.push_back(chart.end.state);
  }
  for (const ComparisonCourse& comparison : course.comparisons)
    snapshot.comparisons.emplace_back(std::make_shared<const ComparisonView>(comparison.end));
  return snapshot;
}

}  // namespace

bool PeriodRecord::empty() const {
  const auto measured = [](const ChartCourse& chart) { return chart.readings > 0; };
  const auto paired = [](const ComparisonCourse& comparison) { return !comparison.pairs.empty(); };
  return files.empty() && interventions.empty() && std::ranges::none_of(course.charts, measured) &&
         std::ranges::none_of(course.comparisons, paired);
}

PeriodRecord gather_record(JournalReader& reader, const Config& config, const ReportPeriod& period,
                           Instant now) {
  PeriodRecord record;
  record.period = period;
  record.made_at = now;
  record.config_file = config.file.string();
  record.config_sha256 = sha256_hex(config.text);
  record.proof = reader.prove();
  record.source = reader.source();
  record.course = course_of(reader, config.settings, period);
  record.snapshot = snapshot_of(config, record.course, period);
  record.snapshot.config_sha256 = record.config_sha256;
  record.alerts = reader.alerts_between(period.from, period.to);
  record.interventions = reader.interventions();
  std::erase_if(record.interventions, [&](const JournalIntervention& done) {
    return done.at < period.from || done.at >= period.to;
  });
  record.files = reader.files_between(period.from, period.to);
  reader.each_rejected_between(period.from, period.to,
                               [&](RejectedRow&& row) { record.rejected.push_back(std::move(row)); });
  record.configurations = in_use(reader.configurations(), period);
  return record;
}

AlertThen alert_at_end(const AlertRecord& record, const ReportPeriod& period) {
  const StoredTransition* last = &record.history.front();
  for (const StoredTransition& transition : record.history)
    if (transition.at < period.to) last = &transition;
  return {alert_from_json(last->body), alert_from_json(record.body)};
}

}  // namespace agreed
