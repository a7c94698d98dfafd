#pragma once
// What was asked of a plan on the command line, by the configuration's own names.
#include <map>
#include <optional>
#include <utility>

#include "core/base/settings.hpp"
#include "core/plan/notice.hpp"
#include "daemon/cli/command_line.hpp"

namespace agreed::plan {

/// A shift of one analyzer in this measurand is to be noticed.
struct MeasurandNotice {
  MeasurandIndex measurand;
  NoticeWish wish;
};

struct Wishes {
  /// Repeatabilities given: sd of one reading, in the measurand's unit.
  std::map<std::pair<AnalyzerIndex, MeasurandIndex>, double> sds;
  std::optional<double> false_alerts_per_year;
  std::optional<MeasurandNotice> notice;

  [[nodiscard]] std::optional<double> sd_of(AnalyzerIndex analyzer, MeasurandIndex measurand) const;
};

/// Of an sd, one given for an analyzer goes before one given for all. Throws WrongUse for a name that is not
/// configured (with the nearest), an sd given twice, a measurand that is needed and not named.
[[nodiscard]] Wishes read_wishes(const PlanCommand& command, const Settings& settings);

}  // namespace agreed::plan
