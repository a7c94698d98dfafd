#pragma once
// The small words that all alerts share: numbers with their unit, times, names. Inside core/alert only.
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "core/alert/alert.hpp"
#include "core/base/number_text.hpp"
#include "core/base/rfc3339.hpp"
#include "core/base/settings.hpp"

namespace agreed {

/// The parts of an alert's text; an empty part is left out.
struct AlertWords {
  std::string title;
  std::string found;               ///< numbers with units and limits
  std::string since;               ///< estimated start
  std::string cause;               ///< which analyzer is likely, and how sure that is
  std::string doubt;               ///< which results
  std::vector<std::string> steps;  ///< what to do next, in order
};

/// How numbers of one measurand are written.
class NumberStyle {
 public:
  /// Of an id that is not configured: no unit, five significant digits.
  NumberStyle(const Settings& settings, const std::string& measurand);

  [[nodiscard]] std::string result(double value) const;  ///< "10.62 g/100 g": as the analyzer prints it
  [[nodiscard]] std::string mean(double value) const;    ///< one digit more: means, limits, shifts
  /// "10.530 to 10.710 g/100 g".
  [[nodiscard]] std::string range(double low, double high) const;

 private:
  std::string unit_;
  std::optional<int> decimals_;
};

/// 0.999 -> "99.9 %".
[[nodiscard]] std::string percent(double share);
/// The id, and the title behind it where there is one: "line2 (NIR analyzer, packing line 2)".
[[nodiscard]] std::string analyzer_words(const Settings& settings, const std::string& id);
/// " (change score 4.61, limit 4.08)", or empty.
[[nodiscard]] std::string score_words(const Details& details);
/// "higher" or "lower".
[[nodiscard]] const char* direction(double shift);
/// When it began and how sure that is; empty when nothing is known.
[[nodiscard]] std::string since_words(const Alert& alert);
/// " since 2026-02-04 22:00 UTC": the earliest start that is likely; empty when nothing is known.
[[nodiscard]] std::string earliest_start(const Alert& alert);
/// "a", "a and b", "a, b and c", or of many the newest five: "c, d, e, f, g (the newest of 12)".
[[nodiscard]] std::string list_words(const std::vector<std::string>& names);
/// The id, or `otherwise` when it is empty.
[[nodiscard]] std::string or_else(const std::string& id, const char* otherwise);

[[nodiscard]] AlertWords chart_words(const Alert& alert, const Settings& settings);
[[nodiscard]] AlertWords comparison_words(const Alert& alert, const Settings& settings);
[[nodiscard]] AlertWords service_words(const Alert& alert, const Settings& settings);

}  // namespace agreed
