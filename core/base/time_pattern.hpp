#pragma once
// Times as an instrument's export writes them, by a pattern.
#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

#include "core/base/rfc3339.hpp"

namespace agreed {

/// A pattern of these parts (as in strptime of POSIX.1-2017 where it has them); everything else stands for
/// itself, a space for one or more spaces:
/// %Y year in four digits; %y in two (00 to 68: 20xx, 69 to 99: 19xx); %m month, %d day, %H hour 0 to 23,
/// %I hour 1 to 12, %M minute in one or two digits; %S second with any decimals after . or ,; %p AM or PM;
/// %b month and %a weekday by their English names, long or short, letter case ignored (the weekday is not
/// compared with the date); %z offset as +01:00, +0100, +01 or Z; %F = %Y-%m-%d, %T = %H:%M:%S, %R = %H:%M;
/// %% a percent sign. The words `unix_seconds` and `unix_milliseconds`: a number counted from 1970 in UTC.
/// Own code: a general parser of dates took 1 us a row, twice what all else of a row takes.
class TimePattern {
 public:
  /// Throws std::invalid_argument with the fault.
  explicit TimePattern(std::string_view pattern);

  /// Why a pattern cannot be used; empty if it can.
  [[nodiscard]] static std::string fault_of(std::string_view pattern);

  /// The whole text or nothing. Digits beyond the millisecond are cut, a second 60 is read as 59.999, as by
  /// parse_rfc3339.
  [[nodiscard]] std::optional<ParsedTime> parse(std::string_view text) const;
  /// How a time looks in this pattern, for messages: "31.12.2025 13:45:59".
  [[nodiscard]] std::string example() const;
  /// The pattern says the offset from UTC.
  [[nodiscard]] bool has_offset() const;

 private:
  enum class Epoch : std::uint8_t { none, seconds, milliseconds };
  struct Part {
    char directive = 0;  ///< 0: the letter stands for itself
    char letter = 0;
  };

  std::vector<Part> parts_;
  Epoch epoch_ = Epoch::none;
};

}  // namespace agreed
