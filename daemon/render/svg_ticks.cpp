#include "daemon/render/svg_ticks.hpp"

#include <algorithm>
#include <array>
#include <chrono>
#include <cmath>
#include <cstdint>

#include "daemon/render/page_text.hpp"

namespace agreed {
namespace {
using namespace std::chrono;

constexpr std::array<const char*, 12> kMonths = {"Jan", "Feb", "Mar", "Apr", "May", "Jun",
                                                 "Jul", "Aug", "Sep", "Oct", "Nov", "Dec"};

// Round steps below a month, in minutes.
constexpr std::array<std::int64_t, 16> kMinuteSteps = {1,   2,   5,   10,   15,   30,   60,    120,
                                                       180, 360, 720, 1440, 2880, 5760, 10080, 20160};
constexpr std::array<int, 7> kMonthSteps = {1, 2, 3, 6, 12, 24, 60};

std::string month_name(month m) {
  return kMonths.at(static_cast<unsigned>(m) - 1);
}

std::string two_digits(std::int64_t number) {
  return (number < 10 ? "0" : "") + std::to_string(number);
}

std::string tick_label(Instant at) {
  const auto day_start = floor<days>(at);
  const year_month_day date{day_start};
  if (at == day_start)
    return std::to_string(static_cast<unsigned>(date.day())) + " " + month_name(date.month());
  const hh_mm_ss clock{at - day_start};
  return two_digits(clock.hours().count()) + ":" + two_digits(clock.minutes().count());
}

std::vector<Tick> month_ticks(Instant low, Instant high, int most) {
  const auto first = year_month_day{floor<days>(low)}, last = year_month_day{floor<days>(high)};
  const int from =
      static_cast<int>(first.year()) * 12 + static_cast<int>(static_cast<unsigned>(first.month())) - 1;
  const int to =
      static_cast<int>(last.year()) * 12 + static_cast<int>(static_cast<unsigned>(last.month())) - 1;
  int step = kMonthSteps.back();
  for (const int candidate : kMonthSteps)
    if ((to - from) / candidate + 1 <= most) {
      step = candidate;
      break;
    }
  std::vector<Tick> ticks;
  for (int i = from - from % step; i <= to && static_cast<int>(ticks.size()) < most; i += step) {
    const year_month_day date{year{i / 12}, month{static_cast<unsigned>(i % 12 + 1)}, day{1}};
    const Instant at{sys_days{date}};
    if (at < low || at > high) continue;
    ticks.push_back({static_cast<double>(at.time_since_epoch().count()),
                     month_name(date.month()) + " " + std::to_string(static_cast<int>(date.year()))});
  }
  return ticks;
}

}  // namespace

std::vector<Tick> value_ticks(double low, double high, int wanted) {
  std::vector<Tick> ticks;
  if (!(std::isfinite(low) && std::isfinite(high) && low < high) || wanted < 1) return ticks;
  const double raw = (high - low) / wanted;
  const double power = std::pow(10.0, std::floor(std::log10(raw)));
  const double lead = raw / power;
  const double step = power * (lead <= 1.5 ? 1 : lead <= 3.5 ? 2 : lead <= 7.5 ? 5 : 10);
  const int decimals = std::max(0, -static_cast<int>(std::floor(std::log10(step) + 1e-9)));
  // Counted in whole steps, so that no rounding adds up; a bound against steps too small for the values.
  const double first = std::ceil(low / step - 1e-9), last = std::floor(high / step + 1e-9);
  if (!(last - first < 1000)) return ticks;
  const int steps = static_cast<int>(last - first);
  for (int i = 0; i <= steps; ++i) {
    const double value = (first + i) * step;
    ticks.push_back({value, shown(value, decimals)});
  }
  return ticks;
}

std::vector<Tick> time_ticks(double low, double high, int most) {
  constexpr double kFarthest = 8.0e15;  // milliseconds; years of six digits have no calendar here
  if (!(low < high) || std::abs(low) > kFarthest || std::abs(high) > kFarthest || most < 1) return {};
  const Instant from{Duration(static_cast<std::int64_t>(std::ceil(low)))};
  const Instant to{Duration(static_cast<std::int64_t>(std::floor(high)))};
  for (const std::int64_t step_minutes : kMinuteSteps) {
    const std::int64_t step = step_minutes * 60'000;
    // Weeks begin on Mondays: 1970-01-05 was one.
    const std::int64_t origin = step_minutes % 10080 == 0 ? 4LL * 86'400'000 : 0;
    const auto count = [&](Instant at) {
      return static_cast<std::int64_t>(std::floor(
          static_cast<double>(at.time_since_epoch().count() - origin) / static_cast<double>(step)));
    };
    if (count(to) - count(from) + 1 > most) continue;
    std::vector<Tick> ticks;
    for (std::int64_t i = count(from); i <= count(to); ++i) {
      const Instant at{Duration(origin + i * step)};
      if (at >= from && at <= to) ticks.push_back({static_cast<double>(origin + i * step), tick_label(at)});
    }
    return ticks;
  }
  return month_ticks(from, to, most);
}

}  // namespace agreed
