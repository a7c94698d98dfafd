#include "daemon/intake/result_text.hpp"

#include <charconv>
#include <cmath>

#include "core/base/ascii.hpp"

namespace agreed {

std::optional<ResultText> parse_result(std::string_view text) {
  ResultText result;
  if (!text.empty() && (text.front() == '<' || text.front() == '>')) {
    result.censored = text.front() == '<' ? Censoring::below : Censoring::above;
    text = ascii::trimmed(text.substr(1));
  }
  // from_chars would also read "nan" and "inf", and does not read a plus sign.
  if (text.find_first_not_of("0123456789+-.eE") != std::string_view::npos) return std::nullopt;
  if (text.size() > 1 && text.front() == '+' && text[1] != '-') text.remove_prefix(1);
  const char* const end = text.data() + text.size();
  const auto [stop, error] = std::from_chars(text.data(), end, result.value);
  if (error != std::errc{} || stop != end || !std::isfinite(result.value)) return std::nullopt;
  result.value += 0.0;  // -0 becomes 0, so that equal results have equal bits
  return result;
}

std::optional<std::int32_t> parse_replicate(std::string_view text) {
  std::int32_t number = 0;
  const char* const end = text.data() + text.size();
  const auto [stop, error] = std::from_chars(text.data(), end, number);
  if (error != std::errc{} || stop != end || text.front() == '-') return std::nullopt;
  return number;
}

}  // namespace agreed
