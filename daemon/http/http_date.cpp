#include "daemon/http/http_date.hpp"

#include <array>
#include <cstdio>

namespace agreed {

std::string http_date(std::time_t at) {
  constexpr std::array<const char*, 7> days = {"Sun", "Mon", "Tue", "Wed", "Thu", "Fri", "Sat"};
  constexpr std::array<const char*, 12> months = {"Jan", "Feb", "Mar", "Apr", "May", "Jun",
                                                  "Jul", "Aug", "Sep", "Oct", "Nov", "Dec"};
  std::tm utc{};
  if (!::gmtime_r(&at, &utc)) return {};
  std::array<char, 64> text{};
  const int length = std::snprintf(text.data(), text.size(), "%s, %02d %s %04d %02d:%02d:%02d GMT",
                                   days.at(static_cast<std::size_t>(utc.tm_wday)), utc.tm_mday,
                                   months.at(static_cast<std::size_t>(utc.tm_mon)), utc.tm_year + 1900,
                                   utc.tm_hour, utc.tm_min, utc.tm_sec);
  return {text.data(), static_cast<std::size_t>(length)};
}

}  // namespace agreed
