#pragma once
// Local times of an analyzer whose export writes no offset. Uses the system's time zone database.
#include <string>

#include "core/base/instant.hpp"

namespace date {
class time_zone;
}

namespace agreed {

enum class LocalOutcome { clear, ambiguous, missing, too_late };

struct LocalReading {
  Instant at{};  ///< for clear and ambiguous; an ambiguous time takes the earlier instant
  LocalOutcome outcome = LocalOutcome::clear;
};

class LocalZone {
 public:
  /// Throws std::runtime_error if the database has no such zone.
  explicit LocalZone(const std::string& name);

  [[nodiscard]] const std::string& name() const { return name_; }
  /// `local`: the local time read as if it were UTC. Years after 2037 are too late: the zone library knows no
  /// summer time there.
  [[nodiscard]] LocalReading read(Instant local) const;

 private:
  std::string name_;
  const date::time_zone* zone_;
};

}  // namespace agreed
