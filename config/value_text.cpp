#include "config/value_text.hpp"

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>

#include "core/base/ascii.hpp"
#include "core/base/number_text.hpp"
#include "core/base/rfc3339.hpp"

namespace agreed::settings_file {
namespace {

constexpr std::size_t kLongestShown = 60;

struct Unit {
  std::string_view name;
  long long milliseconds;
};
// From the largest, so that the first that divides is the shortest way to write a duration.
constexpr std::array<Unit, 5> kUnits = {
    {{"d", 86'400'000}, {"h", 3'600'000}, {"min", 60'000}, {"s", 1'000}, {"ms", 1}}};
constexpr long long kLongest = 36'525LL * 86'400'000;  // 100 years

std::size_t digits_at(std::string_view text, std::size_t at) {
  std::size_t count = 0;
  while (at + count < text.size() && ascii::is_digit(text[at + count])) ++count;
  return count;
}

/// Length of the sign and the whole part, which must not have a zero in front; 0 if there is none.
std::size_t whole_part(std::string_view text) {
  const std::size_t sign = !text.empty() && (text[0] == '-' || text[0] == '+') ? 1 : 0;
  const std::size_t count = digits_at(text, sign);
  if (count == 0 || (count > 1 && text[sign] == '0')) return 0;
  return sign + count;
}

bool is_decimal_number(std::string_view text) {
  std::size_t at = whole_part(text);
  if (at == 0) return false;
  if (at < text.size() && text[at] == '.') {
    const std::size_t decimals = digits_at(text, at + 1);
    if (decimals == 0) return false;
    at += 1 + decimals;
  }
  if (at < text.size() && (text[at] == 'e' || text[at] == 'E')) {
    ++at;
    if (at < text.size() && (text[at] == '-' || text[at] == '+')) ++at;
    const std::size_t exponent = digits_at(text, at);
    if (exponent == 0) return false;
    at += exponent;
  }
  return at == text.size();
}

/// std::from_chars knows no plus sign.
std::string_view without_plus(std::string_view text) {
  return !text.empty() && text[0] == '+' ? text.substr(1) : text;
}

}  // namespace

std::optional<double> number_of(std::string_view text) {
  if (!is_decimal_number(text)) return std::nullopt;
  const std::string_view body = without_plus(text);
  double value = 0;
  const auto result = std::from_chars(body.data(), body.data() + body.size(), value);
  if (result.ec != std::errc{} || !std::isfinite(value)) return std::nullopt;
  return value;
}

std::optional<long long> whole_number_of(std::string_view text) {
  if (whole_part(text) == 0 || whole_part(text) != text.size()) return std::nullopt;
  const std::string_view body = without_plus(text);
  long long value = 0;
  const auto result = std::from_chars(body.data(), body.data() + body.size(), value);
  if (result.ec != std::errc{}) return std::nullopt;
  return value;
}

std::optional<bool> flag_of(std::string_view text) {
  if (text == "true") return true;
  if (text == "false") return false;
  return std::nullopt;
}

std::optional<Duration> duration_of(std::string_view text) {
  const std::size_t count = digits_at(text, 0);
  const auto amount = whole_number_of(text.substr(0, count));
  if (!amount) return std::nullopt;
  for (const Unit& unit : kUnits)
    if (text.substr(count) == unit.name && *amount <= kLongest / unit.milliseconds)
      return Duration(*amount * unit.milliseconds);
  return std::nullopt;
}

std::optional<Instant> time_of(std::string_view text) {
  constexpr std::size_t kDateLength = 10;
  const bool date_alone = text.size() == kDateLength;
  const auto parsed = parse_rfc3339(date_alone ? std::string(text) + "T00:00:00Z" : std::string(text));
  if (!parsed || !parsed->offset_given) return std::nullopt;
  return parsed->at;
}

bool is_id(std::string_view text) {
  constexpr std::size_t kLongestId = 64;
  if (text.empty() || text.size() > kLongestId || !ascii::is_letter_or_digit(text[0])) return false;
  return std::all_of(text.begin(), text.end(),
                     [](char c) { return ascii::is_letter_or_digit(c) || c == '_' || c == '-'; });
}

std::string shown(std::string_view text) {
  std::string safe = "'";
  for (const char c : text) {
    const bool starts_character = (static_cast<unsigned char>(c) & 0xC0U) != 0x80;
    if (starts_character && safe.size() > kLongestShown) return safe + "...'";
    const auto byte = static_cast<unsigned char>(c);
    if (byte >= 0x20 && byte != 0x7F) {
      safe += c;
    } else {
      constexpr std::string_view kHex = "0123456789abcdef";
      safe += "\\x";
      safe += kHex[byte >> 4U];
      safe += kHex[byte & 0xFU];
    }
  }
  return safe + '\'';
}

std::string shown_key(std::string_view text) {
  return is_id(text) ? std::string(text) : shown(text);
}

std::string shown(double value) {
  return exact(value);
}

std::string shown(Duration duration) {
  for (const Unit& unit : kUnits)
    if (duration.count() != 0 && duration.count() % unit.milliseconds == 0)
      return std::to_string(duration.count() / unit.milliseconds) + std::string(unit.name);
  return "0s";
}

}  // namespace agreed::settings_file
