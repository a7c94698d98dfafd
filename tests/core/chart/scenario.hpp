#pragma once
// A chart that has been fed without a false alert, for the tests of what comes then, and all that it shows.
#include <cstdio>
#include <optional>
#include <string>

#include <doctest/doctest.h>

#include "tests/core/chart/support.hpp"

namespace agreed::test {

inline void feed(Fed& fed, Readings& next, int count, double mean = 10, double sd = 1) {
  for (int i = 0; i < count; ++i) fed.read(mean + sd * next());
}

// A start that raises no false alert, so that the scenario is what opens one.
struct Scenario {
  Settings settings = mill(1800);
  Readings next;
  Fed fed{settings};
  explicit Scenario(std::uint64_t seed, int before = 100) : next(seed) {
    feed(fed, next, before);
    REQUIRE(fed.findings.empty());
  }
};

/// Everything a view holds, to the bit.
inline std::string dump(const ChartView& view) {
  std::string text;
  const auto number = [&](std::optional<double> value) {
    char buffer[40];
    std::snprintf(buffer, sizeof buffer, value ? "%a " : "- ", value.value_or(0));
    text += buffer;
  };
  const auto time = [&](std::optional<Instant> at) {
    text += at ? std::to_string(at->time_since_epoch().count()) + " " : "- ";
  };
  text += view.lot + to_string(view.state) + view.pattern;
  for (const auto value :
       {view.baseline.center, view.baseline.sd, view.baseline.sigma, view.baseline.sigma_degrees_of_freedom,
        view.baseline.moving_range_mean, view.upper_limit, view.lower_limit, view.change.score,
        view.change.shift, view.precision.score, view.precision.ratio_of_sd, view.serial_correlation})
    number(value);
  time(view.change.started_at);
  if (view.change.started_between)
    time(view.change.started_between->first), time(view.change.started_between->last);
  text += std::to_string(view.baseline.readings) + " " + std::to_string(view.baseline.set_aside);
  for (const std::string& warning : view.warnings) text += warning;
  for (const StretchMark& mark : view.marks) time(mark.at), text += mark.what;
  for (const ChartPoint& point : view.points) {
    time(point.measured_at);
    for (const auto value : {std::optional(point.value), point.moving_range, point.score,
                             point.precision_score, point.upper, point.lower})
      number(value);
    for (const ChartSignal signal : point.signals) text += to_string(signal);
    text += point.set_aside ? "a" : "";
    text += point.starts_stretch ? "s\n" : "\n";
  }
  return text;
}

}  // namespace agreed::test
