#include "daemon/intake/result_style.hpp"

#include <array>
#include <charconv>
#include <cmath>
#include <utility>

#include "core/base/ascii.hpp"
#include "daemon/intake/result_text.hpp"

namespace agreed {
namespace {

constexpr std::string_view kNoNumber = "?";
constexpr std::size_t kGroup = 3;
constexpr std::array<std::string_view, 3> kWideSpaces = {"\xC2\xA0", "\xE2\x80\xAF", "\xE2\x80\x89"};

std::optional<int> power_of_ten(double factor) {
  constexpr int kMost = 30;
  for (int power = -kMost; power <= kMost; ++power)
    if (parse_result("1e" + std::to_string(power)).value_or(ResultText{}).value == factor) return power;
  return std::nullopt;
}

}  // namespace

ResultStyle::ResultStyle(char decimal, std::string thousands, double factor)
    : decimal_(decimal),
      thousands_(std::move(thousands)),
      factor_(factor),
      power_of_ten_(power_of_ten(factor)) {}

std::string_view ResultStyle::plain(std::string_view text, std::string& room) const {
  text = ascii::trimmed(text);
  const bool is_plain = decimal_ == '.' && thousands_.empty();
  if (is_plain && power_of_ten_ == 0) return text;
  if (text.empty()) return text;
  room.clear();
  if (!rewrite(text, room)) return kNoNumber;
  if (power_of_ten_ == 0) return room;
  return multiply(room) ? std::string_view(room) : kNoNumber;
}

std::string ResultStyle::example() const {
  return decimal_ == ',' ? "12,34, <0,05 or >20" : "12.34, <0.05 or >20";
}

std::size_t ResultStyle::separator_size(std::string_view text) const {
  if (thousands_.empty()) return 0;
  if (text.starts_with(thousands_)) return thousands_.size();
  if (thousands_ != " ") return 0;
  for (const std::string_view space : kWideSpaces)
    if (text.starts_with(space)) return space.size();
  return 0;
}

bool ResultStyle::rewrite(std::string_view text, std::string& into) const {
  std::size_t at = 0;
  while (at < text.size() && !ascii::is_digit(text[at]) && text[at] != decimal_) {
    if (std::string_view("<>+- ").find(text[at]) == std::string_view::npos) return false;
    into += text[at++];
  }
  std::size_t in_group = 0, groups = 0;
  for (; at < text.size(); ++in_group) {
    if (const std::size_t size = separator_size(text.substr(at)); size > 0) {
      const bool whole = groups == 0 ? in_group >= 1 && in_group <= kGroup : in_group == kGroup;
      if (!whole) return false;
      ++groups;
      in_group = 0;
      at += size;
    }
    if (at == text.size() || !ascii::is_digit(text[at])) break;
    into += text[at++];
  }
  if (groups > 0 && in_group != kGroup) return false;
  if (at < text.size() && text[at] == decimal_) {
    into += '.';
    for (++at; at < text.size() && ascii::is_digit(text[at]); ++at) into += text[at];
  }
  if (at < text.size() && text[at] != 'e' && text[at] != 'E') return false;
  into.append(text.substr(at));
  return true;
}

bool ResultStyle::multiply(std::string& number) const {
  const auto read = parse_result(number);
  if (!read) return false;
  if (power_of_ten_ && number.find_first_of("eE") == std::string::npos) {
    number += 'e';
    number += std::to_string(*power_of_ten_);
    return true;
  }
  const double product = read->value * factor_;
  if (!std::isfinite(product)) return false;
  std::array<char, 32> digits{};
  const auto [end, error] = std::to_chars(digits.data(), digits.data() + digits.size(), product);
  if (error != std::errc{}) return false;
  number = read->censored == Censoring::below ? "<" : read->censored == Censoring::above ? ">" : "";
  number.append(digits.data(), end);
  return true;
}

}  // namespace agreed
