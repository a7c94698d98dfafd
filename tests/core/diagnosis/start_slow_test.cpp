// How often the period shown as the possible start of a change holds the true start. Printed beside each:
// what the simulations behind the method gave.
#include <chrono>
#include <cmath>
#include <random>

#include <doctest/doctest.h>

#include "core/chart/chart.hpp"
#include "core/pair/pair_chart.hpp"

using namespace agreed;

namespace {
Instant hour(int h) {
  return Instant{std::chrono::hours(h)};
}

struct Coverage {
  int asked = 0, covered = 0;

  void count(const std::optional<Period>& shown, Instant truth) {
    if (!shown) return;
    ++asked;
    covered += shown->first <= truth && truth <= shown->last ? 1 : 0;
  }
  [[nodiscard]] double percent() const { return 100.0 * covered / asked; }
};

Settings one_chart() {
  Settings settings;
  settings.analyzers = {{"line1", "line1"}};
  settings.measurands = {{"protein", "protein", "g/100 g", {}, {}, {}}};
  settings.standards = {{"wheat-low", "wheat-low"}};
  ChartSettings chart;
  chart.level_run_length = chart.precision_run_length = 1800;
  chart.lots = {{"2026-A", {}, {}}};
  settings.charts = {chart};
  return settings;
}
}  // namespace

TEST_CASE(
    "check readings: a step of 1, 2 and 3 sd after 33 or 103 readings, at the signal and ten readings "
    "later") {
  const Settings settings = one_chart();
  std::mt19937_64 random(1970);
  std::normal_distribution<double> error;
  Coverage all_at_signal, all_later;
  for (const int before : {33, 103})
    for (const double step : {1.0, 2.0, 3.0}) {
      Coverage at_signal, later;
      for (int stream = 0; stream < 400; ++stream) {
        Chart chart(settings, {0});
        std::vector<Finding> findings;
        int signal_at = -1;
        for (int i = 0; i < before + 200; ++i) {
          chart.add(CheckReading{hour(i), {0}, {0}, {0}, 0, error(random) + (i >= before ? step : 0)},
                    findings);
          if (signal_at < 0 && chart.state() == ChartState::unstable) {
            if (i < before) break;  // a false one
            signal_at = i;
            at_signal.count(chart.view().change.started_between, hour(before));
          }
          if (signal_at >= 0 && i == signal_at + 10) {
            if (chart.state() == ChartState::unstable)
              later.count(chart.view().change.started_between, hour(before));
            break;
          }
        }
      }
      MESSAGE("check readings, " << step << " sd after " << before << ": at the signal "
                                 << at_signal.percent() << " % of " << at_signal.asked << ", ten later "
                                 << later.percent() << " % of " << later.asked);
      const double spread = 300 * std::sqrt(0.9 * 0.1 / at_signal.asked);
      CHECK(at_signal.percent() > 87 - spread);
      CHECK(later.percent() > 91 - spread);
      all_at_signal.asked += at_signal.asked;
      all_at_signal.covered += at_signal.covered;
      all_later.asked += later.asked;
      all_later.covered += later.covered;
    }
  // Together: 87 to 98 % at the signal, 91 to 98 % later.
  CHECK(all_at_signal.percent() > 87);
  CHECK(all_at_signal.percent() < 99);
  CHECK(all_later.percent() > 91);
}

TEST_CASE("pairs: a step of 1, 2 and 3 sd of a pair after 60 pairs, at the signal and ten pairs later") {
  constexpr double limit = 4.2;
  std::mt19937_64 random(1971);
  std::normal_distribution<double> error;
  std::uniform_real_distribution<double> level(0, 40);
  Coverage all_at_signal, all_later;
  for (const double step : {1.0, 2.0, 3.0}) {
    Coverage at_signal, later;
    for (int stream = 0; stream < 500; ++stream) {
      PairChart chart(400, 0);
      int signal_at = -1;
      for (int i = 0; i < 300; ++i) {
        const double truth = level(random);
        chart.insert({truth + error(random), truth + error(random) + (i >= 60 ? step * std::sqrt(2.0) : 0)},
                     hour(i));
        if (signal_at < 0 && chart.evidence(1).value_or(0) > evidence_of_score(limit)) {
          if (i < 60) break;
          signal_at = i;
          at_signal.count(chart.best_split(1)->started_between, hour(60));
        }
        if (signal_at >= 0 && i == signal_at + 10) {
          later.count(chart.best_split(1)->started_between, hour(60));
          break;
        }
      }
    }
    MESSAGE("pairs, " << step << " sd: at the signal " << at_signal.percent() << " % of " << at_signal.asked
                      << ", ten later " << later.percent() << " %");
    all_at_signal.asked += at_signal.asked;
    all_at_signal.covered += at_signal.covered;
    all_later.asked += later.asked;
    all_later.covered += later.covered;
  }
  CHECK(all_at_signal.percent() > 87);
  CHECK(all_later.percent() > 91);
}
