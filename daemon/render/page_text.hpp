#pragma once
// Text for the page: escaping, numbers, times. Every function returns plain text unless its name ends in
// _html.
#include <optional>
#include <string>
#include <string_view>

#include "core/base/instant.hpp"
#include "core/base/number_text.hpp"
#include "core/base/rfc3339.hpp"
#include "core/base/settings.hpp"

namespace agreed {

/// For element content and quoted attributes alike: & < > " ' become references, control characters a space.
[[nodiscard]] std::string escaped(std::string_view text);
/// Escaped, with the times in it kept from being broken over two lines.
[[nodiscard]] std::string flowing_html(std::string_view text);
/// One segment of a path: all but letters, digits, - _ . ~ percent-encoded.
[[nodiscard]] std::string path_segment(std::string_view text);
/// Letters, digits and - only, so that it may stand in an id attribute.
[[nodiscard]] std::string id_part(std::string_view text);
/// "disagreement_shown" -> "disagreement shown".
[[nodiscard]] std::string spaced(std::string_view code);
/// The text cut to `most` characters (never inside one), with an ellipsis when something was cut.
[[nodiscard]] std::string shortened(std::string_view text, std::size_t most);

/// How numbers of one measurand are shown.
struct PageNumberStyle {
  int decimals = 3;
  std::string unit;
};
/// Decimals: the measurand's resolution and one more; without one, such that `scale` (an allowable difference
/// or a standard deviation, > 0) shows three significant digits.
[[nodiscard]] PageNumberStyle number_style(const Measurand& measurand, std::optional<double> scale);

/// "10.620", with a true minus sign and never "-0"; "not known" for what is no number.
[[nodiscard]] std::string shown(double value, int decimals);
/// The same with + before positive values.
[[nodiscard]] std::string shown_signed(double value, int decimals);
/// "10.620 g/100 g".
[[nodiscard]] std::string with_unit(double value, const PageNumberStyle& style);
/// As short as it goes, at most six significant digits: decision levels and tick labels.
[[nodiscard]] std::string shortest(double value);
/// "98 %", "99.7 %"; a share below one is never shown as 100 %, one above zero never as 0 %.
[[nodiscard]] std::string shown_share(double share);
/// time_words() as a time element.
[[nodiscard]] std::string time_html(Instant at);
/// "12 days", "3 h", "25 min", "a moment".
[[nodiscard]] std::string shown_span(Duration span);

}  // namespace agreed
