#include "daemon/intake/local_zone.hpp"

#include <date/tz.h>

namespace agreed {

LocalZone::LocalZone(const std::string& name) : name_(name), zone_(date::locate_zone(name)) {}

LocalReading LocalZone::read(Instant local) const {
  const std::chrono::year_month_day day{std::chrono::floor<std::chrono::days>(local)};
  if (day.year() > std::chrono::year{2037}) return {{}, LocalOutcome::too_late};
  const date::local_time<Duration> wall{local.time_since_epoch()};
  const date::local_info info = zone_->get_info(wall);
  if (info.result == date::local_info::nonexistent) return {{}, LocalOutcome::missing};
  // Of two readings the first is the one before the change of the clock, thus the earlier instant.
  const bool twice = info.result == date::local_info::ambiguous;
  return {local - info.first.offset, twice ? LocalOutcome::ambiguous : LocalOutcome::clear};
}

}  // namespace agreed
