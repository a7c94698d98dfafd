#pragma once
// Numbers as text, whatever the locale. Of what is no number: "nan", "inf".
#include <concepts>
#include <string>
#include <string_view>

namespace agreed {

/// `decimals` digits after the point, 0 to 64; never "-0.00".
[[nodiscard]] std::string fixed(double value, int decimals);
/// At most `digits` significant digits, with an exponent where that is shorter.
[[nodiscard]] std::string significant(double value, int digits);
/// The shortest text that reads back as the same number.
[[nodiscard]] std::string exact(double value);
/// A whole number without decimals, and the word for it: "1 pair", "7 pairs".
[[nodiscard]] std::string counted(double count, std::string_view one, std::string_view many);

template <std::integral Count>
[[nodiscard]] std::string counted(Count count, std::string_view one, std::string_view many) {
  return std::to_string(count) + " " + std::string(count == 1 ? one : many);
}

}  // namespace agreed
