#include "core/base/rfc3339.hpp"

#include <array>
#include <cstdio>

namespace agreed {
namespace {
using namespace std::chrono;

/// Reads exactly `count` digits at `text[at]` and moves on; nothing if they are not all digits.
std::optional<int> digits(std::string_view text, std::size_t& at, int count) {
  int value = 0;
  for (int i = 0; i < count; ++i, ++at) {
    if (at >= text.size() || text[at] < '0' || text[at] > '9') return std::nullopt;
    value = value * 10 + (text[at] - '0');
  }
  return value;
}

bool skip(std::string_view text, std::size_t& at, std::string_view any_of) {
  if (at >= text.size() || any_of.find(text[at]) == std::string_view::npos) return false;
  ++at;
  return true;
}

/// ".123456" to milliseconds, further digits cut; 0 when there is no point; nothing when no digit follows it.
std::optional<int> fraction(std::string_view text, std::size_t& at) {
  if (!skip(text, at, ".")) return 0;
  int value = 0, scale = 100;
  const std::size_t first = at;
  for (; at < text.size() && text[at] >= '0' && text[at] <= '9'; ++at, scale /= 10)
    value += (text[at] - '0') * scale;
  if (at == first) return std::nullopt;
  return value;
}

std::optional<year_month_day> date_part(std::string_view text, std::size_t& at) {
  const auto y = digits(text, at, 4);
  if (!y || !skip(text, at, "-")) return std::nullopt;
  const auto m = digits(text, at, 2);
  if (!m || !skip(text, at, "-")) return std::nullopt;
  const auto d = digits(text, at, 2);
  if (!d) return std::nullopt;
  const year_month_day date{year{*y}, month{static_cast<unsigned>(*m)}, day{static_cast<unsigned>(*d)}};
  if (!date.ok()) return std::nullopt;
  return date;
}

std::optional<Duration> clock_part(std::string_view text, std::size_t& at) {
  const auto h = digits(text, at, 2);
  if (!h || *h > 23 || !skip(text, at, ":")) return std::nullopt;
  const auto m = digits(text, at, 2);
  if (!m || *m > 59 || !skip(text, at, ":")) return std::nullopt;
  const auto s = digits(text, at, 2);
  if (!s || *s > 60) return std::nullopt;
  const auto ms = fraction(text, at);
  if (!ms) return std::nullopt;
  const Duration minutes_part = hours(*h) + minutes(*m);
  if (*s == 60) return minutes_part + milliseconds(59'999);
  return minutes_part + seconds(*s) + milliseconds(*ms);
}

/// The offset as minutes east of UTC; nothing if it is there but wrong.
std::optional<minutes> offset_part(std::string_view text, std::size_t& at) {
  if (skip(text, at, "Zz")) return minutes(0);
  const bool west = text[at] == '-';
  if (!skip(text, at, "+-")) return std::nullopt;
  const auto h = digits(text, at, 2);
  if (!h || *h > 23 || !skip(text, at, ":")) return std::nullopt;
  const auto m = digits(text, at, 2);
  if (!m || *m > 59) return std::nullopt;
  const minutes east = hours(*h) + minutes(*m);
  return west ? -east : east;
}

}  // namespace

std::string to_rfc3339(Instant at) {
  const auto day_start = floor<days>(at);
  const year_month_day date{day_start};
  const hh_mm_ss clock{at - day_start};
  std::array<char, 40> text{};
  const int length = std::snprintf(
      text.data(), text.size(), "%04d-%02u-%02uT%02d:%02d:%02d.%03dZ", static_cast<int>(date.year()),
      static_cast<unsigned>(date.month()), static_cast<unsigned>(date.day()),
      static_cast<int>(clock.hours().count()), static_cast<int>(clock.minutes().count()),
      static_cast<int>(clock.seconds().count()), static_cast<int>(clock.subseconds().count()));
  return {text.data(), static_cast<std::size_t>(length)};
}

std::string time_words(Instant at) {
  std::string text = to_rfc3339(at).substr(0, 16);
  text[10] = ' ';
  return text + " UTC";
}

std::optional<ParsedTime> parse_rfc3339(std::string_view text) {
  std::size_t at = 0;
  const auto date = date_part(text, at);
  if (!date || !skip(text, at, "Tt ")) return std::nullopt;
  const auto clock = clock_part(text, at);
  if (!clock) return std::nullopt;
  ParsedTime parsed{Instant{sys_days{*date}} + *clock, at < text.size()};
  if (!parsed.offset_given) return parsed;
  const auto east = offset_part(text, at);
  if (!east || at != text.size()) return std::nullopt;
  parsed.at -= *east;
  return parsed;
}

}  // namespace agreed
