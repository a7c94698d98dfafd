#include "core/base/number_text.hpp"

#include <array>
#include <charconv>

namespace agreed {
namespace {

template <class... Format>
std::string written(double value, Format... format) {
  std::array<char, 400> text{};  // 309 digits, a sign, a point and 64 decimals are the most
  const auto done = std::to_chars(text.data(), text.data() + text.size(), value, format...);
  return {text.data(), done.ptr};
}

}  // namespace

std::string fixed(double value, int decimals) {
  auto text = written(value, std::chars_format::fixed, decimals);
  if (text.front() == '-' && text.find_first_not_of("-0.") == std::string::npos) text.erase(0, 1);
  return text;
}

std::string significant(double value, int digits) {
  return written(value, std::chars_format::general, digits);
}

std::string exact(double value) {
  return written(value);
}

std::string counted(double count, std::string_view one, std::string_view many) {
  const std::string number = fixed(count, 0);
  return number + " " + std::string(number == "1" ? one : many);
}

}  // namespace agreed
