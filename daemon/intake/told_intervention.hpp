#pragma once
// An intervention that somebody tells the running service: judged like a row of a file.
#include <memory>
#include <optional>
#include <string>
#include <string_view>
#include <variant>
#include <vector>

#include "config/config.hpp"
#include "daemon/intake/local_zone.hpp"
#include "daemon/intake/row.hpp"

namespace agreed {

/// As it was told; what is empty was not.
struct ToldIntervention {
  std::string analyzer, standard, measurand, kind, at, by, note;
};

/// Which field cannot be used, and why: what was found and what was expected.
struct FieldFault {
  std::string_view field;  ///< "analyzer", ..., "note"
  std::string reason;
};

class InterventionReader {
 public:
  /// `intake` by AnalyzerIndex. Throws std::runtime_error for a time zone that is not known.
  InterventionReader(std::shared_ptr<const Settings> settings, const std::vector<IntakeSettings>& intake);

  /// A row of kind `intervention`. Without `at` it is done now; one without an offset is in the analyzer's
  /// zone. Thread-safe.
  [[nodiscard]] std::variant<Row, FieldFault> read(const ToldIntervention& told, Instant now) const;

 private:
  struct Clock {
    std::shared_ptr<const LocalZone> zone;
    Instant not_before;
  };

  std::shared_ptr<const Settings> settings_;
  std::vector<Clock> clocks_;  ///< by AnalyzerIndex
};

}  // namespace agreed
