#include "core/base/time_pattern.hpp"

#include <algorithm>
#include <array>
#include <charconv>
#include <stdexcept>

#include "core/base/ascii.hpp"

namespace agreed {
namespace {
using namespace std::chrono;

constexpr std::string_view kSeconds = "unix_seconds", kMilliseconds = "unix_milliseconds";
constexpr std::array<std::string_view, 12> kMonths = {"January",   "February", "March",    "April",
                                                      "May",       "June",     "July",     "August",
                                                      "September", "October",  "November", "December"};
constexpr std::array<std::string_view, 7> kWeekdays = {"Sunday",   "Monday", "Tuesday", "Wednesday",
                                                       "Thursday", "Friday", "Saturday"};
constexpr std::size_t kShortName = 3;

/// The parts that stand for several.
std::string spelled_out(std::string_view pattern) {
  std::string full;
  for (std::size_t i = 0; i < pattern.size(); ++i) {
    const bool part = pattern[i] == '%' && i + 1 < pattern.size();
    const char letter = part ? pattern[i + 1] : '\0';
    if (letter == 'F')
      full += "%Y-%m-%d";
    else if (letter == 'T')
      full += "%H:%M:%S";
    else if (letter == 'R')
      full += "%H:%M";
    else if (part)
      full.append({'%', letter});
    else
      full += pattern[i];
    i += part ? 1 : 0;
  }
  return full;
}

/// A text being read from its beginning; what is not there is nothing, and then the place no longer counts.
class Cursor {
 public:
  explicit Cursor(std::string_view text) : text_(text) {}

  [[nodiscard]] bool at_end() const { return text_.empty(); }

  bool take(char c) {
    if (text_.empty() || text_.front() != c) return false;
    text_.remove_prefix(1);
    return true;
  }

  bool spaces() {
    if (!take(' ')) return false;
    while (take(' ')) {
    }
    return true;
  }

  std::optional<int> number(std::size_t least, std::size_t most) {
    int value = 0;
    std::size_t count = 0;
    for (; count < most && count < text_.size() && ascii::is_digit(text_[count]); ++count)
      value = value * 10 + (text_[count] - '0');
    if (count < least) return std::nullopt;
    text_.remove_prefix(count);
    return value;
  }

  /// Decimals of a second after . or , in milliseconds; 0 if there are none; nothing if no digit follows.
  std::optional<int> fraction() {
    if (!take('.') && !take(',')) return 0;
    int value = 0, scale = 100;
    std::size_t count = 0;
    for (; count < text_.size() && ascii::is_digit(text_[count]); ++count, scale /= 10)
      value += (text_[count] - '0') * scale;
    text_.remove_prefix(count);
    return count == 0 ? std::nullopt : std::optional(value);
  }

  /// The position of the name, whole or its first three letters.
  template <std::size_t N>
  std::optional<int> name(const std::array<std::string_view, N>& names) {
    for (std::size_t i = 0; i < N; ++i)
      if (word(names[i]) || word(names[i].substr(0, kShortName))) return static_cast<int>(i);
    return std::nullopt;
  }

  /// The word and no letter after it, letter case ignored.
  bool word(std::string_view expected) {
    if (text_.size() < expected.size() || !ascii::same_letters(text_.substr(0, expected.size()), expected))
      return false;
    const std::string_view rest = text_.substr(expected.size());
    if (!rest.empty() && ascii::is_letter_or_digit(rest.front()) && !ascii::is_digit(rest.front()))
      return false;
    text_ = rest;
    return true;
  }

  /// Minutes east of UTC.
  std::optional<int> offset() {
    if (take('Z') || take('z')) return 0;
    const bool west = !text_.empty() && text_.front() == '-';
    if (!take('+') && !take('-')) return std::nullopt;
    const auto h = number(2, 2);
    if (!h || *h > 23) return std::nullopt;
    const bool colon = take(':');
    const auto m = number(2, 2);
    if ((colon && !m) || m.value_or(0) > 59) return std::nullopt;
    const int east = *h * 60 + m.value_or(0);
    return west ? -east : east;
  }

 private:
  std::string_view text_;
};

struct Fields {
  int year = 0, month = 0, day = 0, hour = 0, minute = 0, second = 0, milliseconds = 0, east = 0;
  bool afternoon = false, twelve_hours = false, offset_given = false;
};

bool set(int& field, std::optional<int> value) {
  field = value.value_or(0);
  return value.has_value();
}

bool set_two_digit_year(Fields& fields, Cursor& text) {
  constexpr int kPivot = 69;
  if (!set(fields.year, text.number(2, 2))) return false;
  fields.year += fields.year < kPivot ? 2000 : 1900;
  return true;
}

bool set_half_of_day(Fields& fields, Cursor& text) {
  fields.afternoon = text.word("PM") || text.word("p.m.");
  return fields.afternoon || text.word("AM") || text.word("a.m.");
}

bool set_month_by_name(Fields& fields, Cursor& text) {
  const auto found = text.name(kMonths);
  fields.month = found.value_or(-1) + 1;
  return found.has_value();
}

bool read_part(char directive, Cursor& text, Fields& fields) {
  switch (directive) {
    case 'Y':
      return set(fields.year, text.number(4, 4));
    case 'y':
      return set_two_digit_year(fields, text);
    case 'm':
      return set(fields.month, text.number(1, 2));
    case 'b':
      return set_month_by_name(fields, text);
    case 'd':
      return set(fields.day, text.number(1, 2));
    case 'I':
      fields.twelve_hours = true;
      return set(fields.hour, text.number(1, 2));
    case 'H':
      return set(fields.hour, text.number(1, 2));
    case 'M':
      return set(fields.minute, text.number(1, 2));
    case 'S':
      return set(fields.second, text.number(1, 2)) && set(fields.milliseconds, text.fraction());
    case 'p':
      return set_half_of_day(fields, text);
    case 'a':
      return text.name(kWeekdays).has_value();
    case 'z':
      fields.offset_given = true;
      return set(fields.east, text.offset());
    default:
      return false;
  }
}

std::optional<ParsedTime> time_of(const Fields& fields) {
  const year_month_day date{year{fields.year}, month{static_cast<unsigned>(fields.month)},
                            day{static_cast<unsigned>(fields.day)}};
  int hour = fields.hour;
  if (fields.twelve_hours) {
    if (hour < 1 || hour > 12) return std::nullopt;
    hour = hour % 12 + (fields.afternoon ? 12 : 0);
  }
  if (!date.ok() || hour > 23 || fields.minute > 59 || fields.second > 60) return std::nullopt;
  Duration clock = hours(hour) + minutes(fields.minute);
  clock += fields.second == 60 ? Duration{59'999} : seconds(fields.second) + Duration{fields.milliseconds};
  return ParsedTime{Instant{sys_days{date}} + clock - minutes(fields.east), fields.offset_given};
}

std::optional<ParsedTime> since_epoch(std::string_view text, std::int64_t per_unit) {
  constexpr std::int64_t kMost = 253'402'300'800'000;  // the year 10000
  std::int64_t whole = 0;
  const char* const end = text.data() + text.size();
  const auto [stop, error] = std::from_chars(text.data(), end, whole);
  if (error != std::errc{} || whole < 0 || whole >= kMost / per_unit) return std::nullopt;
  Cursor rest({stop, static_cast<std::size_t>(end - stop)});
  const auto decimals = rest.fraction();
  if (!decimals || !rest.at_end()) return std::nullopt;
  return ParsedTime{Instant{Duration{whole * per_unit + (per_unit == 1 ? 0 : *decimals)}}, true};
}

/// Of "%x" in a pattern, or "" if there is no such part.
std::string one_part_fault(std::string_view pattern, std::size_t at) {
  constexpr std::string_view kKnown = "YymbdHIMSpaz%FTR";
  if (at + 1 == pattern.size()) return "it ends with a single %";
  if (kKnown.find(pattern[at + 1]) != std::string_view::npos) return "";
  return std::string("it has %") + pattern[at + 1] +
         "; known are %Y %y %m %b %d %H %I %p %M %S %a %z %F %T %R and %%";
}

/// What does not go together among the parts of a pattern that has been spelled out.
std::string parts_fault(std::string_view pattern) {
  std::string letters;
  for (std::size_t i = 0; i < pattern.size(); ++i) {
    if (pattern[i] != '%') continue;
    if (pattern[++i] != '%') letters += pattern[i];
  }
  const auto has = [&](char letter) { return letters.find(letter) != std::string::npos; };
  std::string sorted = letters;
  std::sort(sorted.begin(), sorted.end());
  const auto twice = std::adjacent_find(sorted.begin(), sorted.end());
  if (twice != sorted.end()) return std::string("it has %") + *twice + " twice";
  if (has('Y') == has('y')) return "it needs the year, as %Y or %y";
  if (has('m') == has('b')) return "it needs the month, as %m or %b";
  if (!has('d')) return "it needs the day, as %d";
  if (has('H') == has('I')) return "it needs the hour, as %H, or %I with %p";
  if (has('I') != has('p')) return "%I and %p go together";
  if (!has('M')) return "it needs the minute, as %M";
  return "";
}

}  // namespace

std::string TimePattern::fault_of(std::string_view pattern) {
  if (pattern == kSeconds || pattern == kMilliseconds) return "";
  for (std::size_t i = 0; i < pattern.size(); ++i) {
    if (pattern[i] != '%') continue;
    if (std::string fault = one_part_fault(pattern, i); !fault.empty()) return fault;
    ++i;
  }
  return parts_fault(spelled_out(pattern));
}

TimePattern::TimePattern(std::string_view pattern) {
  if (const std::string fault = fault_of(pattern); !fault.empty())
    throw std::invalid_argument("time pattern: " + fault);
  if (pattern == kSeconds || pattern == kMilliseconds) {
    epoch_ = pattern == kSeconds ? Epoch::seconds : Epoch::milliseconds;
    return;
  }
  const std::string full = spelled_out(pattern);
  for (std::size_t i = 0; i < full.size(); ++i) {
    if (full[i] != '%') {
      parts_.push_back({0, full[i]});
    } else if (full[++i] == '%') {
      parts_.push_back({0, '%'});
    } else {
      parts_.push_back({full[i], 0});
    }
  }
}

std::optional<ParsedTime> TimePattern::parse(std::string_view text) const {
  if (epoch_ != Epoch::none) return since_epoch(text, epoch_ == Epoch::seconds ? 1'000 : 1);
  Cursor cursor(text);
  Fields fields;
  for (const Part& part : parts_) {
    const bool read = part.directive != 0  ? read_part(part.directive, cursor, fields)
                      : part.letter == ' ' ? cursor.spaces()
                                           : cursor.take(part.letter);
    if (!read) return std::nullopt;
  }
  return cursor.at_end() ? time_of(fields) : std::nullopt;
}

std::string TimePattern::example() const {
  if (epoch_ != Epoch::none) return epoch_ == Epoch::seconds ? "1767188759" : "1767188759000";
  std::string text;
  for (const Part& part : parts_) {
    switch (part.directive) {
      case 0:
        text += part.letter;
        break;
      case 'Y':
        text += "2025";
        break;
      case 'y':
        text += "25";
        break;
      case 'm':
        text += "12";
        break;
      case 'b':
        text += "Dec";
        break;
      case 'd':
        text += "31";
        break;
      case 'H':
        text += "13";
        break;
      case 'I':
        text += "01";
        break;
      case 'M':
        text += "45";
        break;
      case 'S':
        text += "59";
        break;
      case 'p':
        text += "PM";
        break;
      case 'a':
        text += "Wed";
        break;
      default:
        text += "+00:00";
    }
  }
  return text;
}

bool TimePattern::has_offset() const {
  return epoch_ != Epoch::none ||
         std::any_of(parts_.begin(), parts_.end(), [](const Part& part) { return part.directive == 'z'; });
}

}  // namespace agreed
