#include "daemon/webhook/retry_after.hpp"

#include <algorithm>
#include <array>
#include <charconv>

#include "core/base/ascii.hpp"

namespace agreed {
namespace {
using namespace std::chrono;

constexpr Duration kLongest = hours(24 * 365);

/// The digits of `text` as a number; nothing if anything else is in it.
std::optional<int> whole(std::string_view text) {
  int value = 0;
  const auto [end, error] = std::from_chars(text.data(), text.data() + text.size(), value);
  if (text.empty() || text.front() == '-' || error != std::errc() || end != text.data() + text.size())
    return std::nullopt;
  return value;
}

std::optional<unsigned> month_of(std::string_view name) {
  constexpr std::array<std::string_view, 12> names = {"Jan", "Feb", "Mar", "Apr", "May", "Jun",
                                                      "Jul", "Aug", "Sep", "Oct", "Nov", "Dec"};
  const auto found = std::find(names.begin(), names.end(), name);
  if (found == names.end()) return std::nullopt;
  return static_cast<unsigned>(found - names.begin()) + 1;
}

/// "Sun, 06 Nov 1994 08:49:37 GMT"; every part has its fixed place.
std::optional<Instant> http_date(std::string_view text) {
  if (text.size() != 29 || text.substr(3, 2) != ", " || text.substr(25) != " GMT" || text[7] != ' ' ||
      text[11] != ' ' || text[16] != ' ' || text[19] != ':' || text[22] != ':')
    return std::nullopt;
  const auto d = whole(text.substr(5, 2)), y = whole(text.substr(12, 4));
  const auto h = whole(text.substr(17, 2)), m = whole(text.substr(20, 2)), s = whole(text.substr(23, 2));
  const auto month_number = month_of(text.substr(8, 3));
  if (!d || !y || !h || !m || !s || !month_number || *h > 23 || *m > 59 || *s > 60) return std::nullopt;
  const year_month_day date{year{*y}, month{*month_number}, day{static_cast<unsigned>(*d)}};
  if (!date.ok()) return std::nullopt;
  return Instant{sys_days{date}} + hours(*h) + minutes(*m) + seconds(*s);
}

}  // namespace

std::optional<Duration> parse_retry_after(std::string_view header, Instant now) {
  header = ascii::trimmed(header);
  if (header.empty()) return std::nullopt;
  if (header.find_first_not_of("0123456789") == std::string_view::npos) {
    const auto count = whole(header);  // nothing: more than an int holds
    return count ? std::min<Duration>(seconds(*count), kLongest) : kLongest;
  }
  const auto date = http_date(header);
  if (!date) return std::nullopt;
  return std::clamp<Duration>(*date - now, Duration::zero(), kLongest);
}

}  // namespace agreed
