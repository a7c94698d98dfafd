#include "core/alert/quiet_hours.hpp"

#include <algorithm>

namespace agreed {
namespace {
using std::chrono::days;
using std::chrono::sys_days;

constexpr days kLongest{3660};
constexpr int kWeek = 7;

bool begins_on(const QuietHours& hours, sys_days day) {
  return hours.days.at(std::chrono::weekday(day).iso_encoding() - 1);
}

Instant begin_of(const QuietHours& hours, sys_days day) {
  return day + hours.from;
}

Instant end_of(const QuietHours& hours, sys_days day) {
  return day + hours.to + (hours.to > hours.from ? days(0) : days(1));
}

/// The end of the rest that `at` lies in; `at` itself while something is expected.
Instant end_of_rest(std::span<const QuietHours> quiet, Instant at) {
  const auto today = std::chrono::floor<days>(at);
  Instant end = at;
  for (const QuietHours& hours : quiet)
    for (const sys_days day : {today - days(1), today})
      if (begins_on(hours, day) && begin_of(hours, day) <= at) end = std::max(end, end_of(hours, day));
  return end;
}

/// The next rest that begins after `at`.
std::optional<Instant> next_rest(std::span<const QuietHours> quiet, Instant at) {
  const auto today = std::chrono::floor<days>(at);
  std::optional<Instant> next;
  for (const QuietHours& hours : quiet)
    for (int ahead = 0; ahead <= kWeek; ++ahead) {
      const sys_days day = today + days(ahead);
      const Instant begin = begin_of(hours, day);
      if (!begins_on(hours, day) || begin <= at) continue;
      next = next ? std::min(*next, begin) : begin;
      break;
    }
  return next;
}
}  // namespace

std::optional<Instant> end_of_wait(std::span<const QuietHours> quiet, Instant from, Duration wait) {
  const Instant latest = from + kLongest;
  Instant at = from;
  while (at < latest) {
    const Instant work = end_of_rest(quiet, at);
    if (work > at) {
      at = work;
      continue;
    }
    const auto rest = next_rest(quiet, at);
    if (!rest || *rest - at >= wait) return at + wait;
    wait -= *rest - at;
    at = *rest;
  }
  return std::nullopt;
}

}  // namespace agreed
