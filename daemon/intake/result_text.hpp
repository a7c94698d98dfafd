#pragma once
// A result as written by an analyzer.
#include <optional>
#include <string_view>

#include "daemon/intake/row.hpp"

namespace agreed {

struct ResultText {
  double value = 0;  ///< finite
  Censoring censored = Censoring::none;
};

/// Reads a decimal number, sign and exponent allowed, "." as decimal sign; `<` or `>` before it says that the
/// result is censored there. Nothing for any other text ("1,5", "nan", "inf", "0x1", "") and for numbers
/// beyond the range of a double.
[[nodiscard]] std::optional<ResultText> parse_result(std::string_view text);

/// Reads an integer from 0 to 2^31 - 1, digits only.
[[nodiscard]] std::optional<std::int32_t> parse_replicate(std::string_view text);

}  // namespace agreed
