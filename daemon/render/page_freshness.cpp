#include "daemon/render/page_freshness.hpp"

#include <cmath>

#include "core/alert/quiet_hours.hpp"

namespace agreed {
namespace {

Freshness freshness(const Snapshot& snapshot, std::string_view what, const std::optional<Instant>& newest,
                    std::optional<Duration> every) {
  Freshness fresh{newest, false, {}};
  if (!newest) return fresh;
  fresh.words =
      "Newest " + std::string(what) + " " + time_words(*newest) + ", " + age_words(*newest, snapshot.at);
  if (!every) {
    fresh.words += ".";
    return fresh;
  }
  const Duration wait(std::llround(static_cast<double>(every->count()) * snapshot.overdue.patience));
  const auto due = end_of_wait(snapshot.overdue.quiet, *newest, wait);
  fresh.overdue = due && *due < snapshot.at;
  fresh.words +=
      std::string(fresh.overdue ? ": overdue" : "") + "; one is due every " + shown_span(*every) + ".";
  return fresh;
}

}  // namespace

std::string age_words(Instant at, Instant now) {
  // Clocks of analyzers may run a little ahead; beyond that it is worth saying.
  if (at > now + std::chrono::minutes(5)) return "by a clock that is ahead";
  return now <= at ? "just now" : shown_span(now - at) + " ago";
}

Freshness freshness_of(const Snapshot& snapshot, const ComparisonScene& scene) {
  const auto& pairs = scene.view.pairs;
  return freshness(snapshot, "pair", pairs.empty() ? std::nullopt : std::optional(pairs.back().measured_at),
                   scene.asked.overdue ? std::optional(scene.asked.every) : std::nullopt);
}

Freshness freshness_of(const Snapshot& snapshot, const ChartScene& scene) {
  const auto& points = scene.view.points;
  return freshness(snapshot, "reading",
                   points.empty() ? std::nullopt : std::optional(points.back().measured_at),
                   scene.asked.overdue ? std::optional(scene.asked.every) : std::nullopt);
}

}  // namespace agreed
