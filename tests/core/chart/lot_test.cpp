// A new lot of a check standard: its level is new, precision and repeatability go on.
#include <doctest/doctest.h>

#include "core/base/distributions.hpp"
#include "core/chart/level_score.hpp"
#include "core/chart/precision_score.hpp"
#include "core/chart/run_length.hpp"
#include "tests/core/chart/scenario.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
// 50 readings of one lot, about 10, then those of the next.
struct TwoLots {
  Settings settings = mill(1800);
  Readings next;
  Fed fed{settings};
  std::vector<double> first, second;

  explicit TwoLots(std::uint64_t seed) : next(seed) {
    settings.charts[0].lots.push_back({"2026-B", hour(51), {}});
    for (int i = 0; i < 50; ++i) {
      first.push_back(10 + next());
      fed.read(first.back());
    }
    REQUIRE(fed.findings.empty());
  }
  void read(double value) {
    second.push_back(value);
    fed.read(value);
  }
  [[nodiscard]] double squares_of_first() const { return static_cast<double>(Moments(first, 0, 50).squares); }
};
}  // namespace

TEST_CASE("limits exist from the second reading of a new lot on, wider for the unknown centre") {
  TwoLots lots(301);
  const double h = limit_for(Score::level, 1800).h;
  for (int n = 1; n <= 40; ++n) {
    lots.read(20 + lots.next());
    const ChartPoint point = lots.fed.chart.view().points.back();
    if (n == 1) {
      CHECK_FALSE(point.upper);
      CHECK(point.starts_stretch);
      continue;
    }
    // Pooled sd of both lots about their own means, on 49 + n - 2 degrees of freedom.
    const auto before = static_cast<std::size_t>(n - 1);
    const Moments own(lots.second, 0, before);
    const double df = 49 + static_cast<double>(before) - 1;
    const double sd = std::sqrt((lots.squares_of_first() + static_cast<double>(own.squares)) / df);
    const double half = t_of_normal_score(h, df) * sd * std::sqrt(1 + 1 / static_cast<double>(before));
    CHECK(*point.upper == doctest::Approx(static_cast<double>(own.mean) + half).epsilon(1e-8));
    CHECK(*point.lower == doctest::Approx(static_cast<double>(own.mean) - half).epsilon(1e-8));
  }
  const ChartView view = lots.fed.chart.view();
  CHECK(view.baseline.readings == 40);
  CHECK(view.baseline.carried_over == 49);
  CHECK(view.baseline.sd_degrees_of_freedom == 88);
  CHECK(view.lot == "2026-B");
}

TEST_CASE("the level score of a new lot uses the scatter carried over, and asks early readings singly") {
  TwoLots lots(302);
  for (int n = 1; n <= 30; ++n) {
    lots.read(20 + lots.next());
    const auto size = static_cast<std::size_t>(n);
    const ChartPoint point = lots.fed.chart.view().points.back();
    CHECK(point.score.has_value() == (n >= 2));
    if (n < 2) continue;
    double best = 0, sign = 1;
    for (std::size_t k = std::min<std::size_t>(3, size - 1); k < size; ++k) {
      const Moments before(lots.second, 0, k), after(lots.second, k, size);
      const auto difference = static_cast<double>(after.mean - before.mean);
      const double between =
          static_cast<double>(k * (size - k)) / static_cast<double>(size) * difference * difference;
      const double rest = static_cast<double>(before.squares + after.squares) + lots.squares_of_first();
      const double t = std::sqrt((static_cast<double>(size) + 49 - 2) * between / rest);
      if (t <= best) continue;
      best = t;
      sign = difference > 0 ? 1 : -1;
    }
    CHECK(*point.score ==
          doctest::Approx(sign * normal_score_of_t(best, static_cast<double>(n) + 47)).epsilon(1e-8));
  }
}

TEST_CASE("a reading of a new lot outside its limits is told at once, be it the second or the tenth") {
  for (const int at : {2, 3, 4, 10}) {
    TwoLots lots(303);
    for (int n = 1; n < at; ++n) lots.read(20 + 0.1 * lots.next());
    REQUIRE(lots.fed.findings.empty());
    lots.read(28);
    CAPTURE(at);
    REQUIRE(lots.fed.unstable());
    CHECK(text_of(lots.fed.findings.back(), "pattern") == "single_reading");
  }
}

TEST_CASE("scatter that grows with the new lot is found, from the lot's first reading on") {
  TwoLots lots(304);
  for (int n = 0; n < 25; ++n) lots.read(20 + 4 * lots.next());
  REQUIRE(lots.fed.unstable());
  std::vector<Finding> now;
  lots.fed.chart.conditions(now);
  REQUIRE(now.size() == 1);
  CHECK(text_of(now[0], "pattern") == "scatter");
  CHECK(*now[0].started_at == hour(51));
  CHECK(number_of(now[0], "readings_before") == doctest::Approx(0));
  CHECK(std::isnan(number_of(now[0], "mean_before")));
  CHECK(std::isnan(number_of(now[0], "shift")));
  CHECK(number_of(now[0], "sd") == doctest::Approx(std::sqrt(lots.squares_of_first() / 49)));
  CHECK_FALSE(lots.fed.chart.view().change.shift);
  // Nothing is learned of such a lot until it ends; then only its own readings are set aside.
  for (int n = 0; n < 80; ++n) lots.read(20 + lots.next());
  CHECK_FALSE(lots.fed.unstable());
  const ChartView view = lots.fed.chart.view();
  CHECK(view.baseline.set_aside > 15);
  CHECK(view.baseline.readings + view.baseline.set_aside == 105);
  for (std::size_t i = 0; i < 50; ++i) CHECK_FALSE(view.points[i].set_aside);
  CHECK(*view.baseline.center == doctest::Approx(20).epsilon(0.05));
  CHECK(*view.baseline.sd == doctest::Approx(1).epsilon(0.25));
}

TEST_CASE("the precision score of a new lot counts the lots before with what lies before every split") {
  TwoLots lots(305);
  std::vector<float> scratch;
  for (int n = 1; n <= 30; ++n) {
    lots.read(20 + lots.next());
    const auto size = static_cast<std::size_t>(n);
    const ChartPoint point = lots.fed.chart.view().points.back();
    CHECK(point.precision_score.has_value() == (n >= 2));
    if (n < 2) continue;
    double best = -1e300;
    for (std::size_t k = 0; k + 2 <= size; ++k) {
      const double own = k > 0 ? static_cast<double>(Moments(lots.second, 0, k).squares) : 0.0;
      const double df1 = 49 + (k > 0 ? static_cast<double>(k - 1) : 0.0),
                   df2 = static_cast<double>(size - k - 1);
      const double f = static_cast<double>(Moments(lots.second, k, size).squares) / df2 /
                       ((own + lots.squares_of_first()) / df1);
      const double a = 2 / (9 * df2), b = 2 / (9 * df1);
      best = std::max(best, ((1 - b) * std::cbrt(f) - (1 - a)) / std::sqrt(b * std::pow(f, 2.0 / 3) + a));
    }
    CHECK(*point.precision_score == doctest::Approx(best).epsilon(1e-8));
  }
}

TEST_CASE("repeatability goes on over lots, on moving ranges within each") {
  TwoLots lots(306);
  const double first = lots.fed.chart.repeatability().degrees_of_freedom;
  double ranges = 0;
  for (std::size_t i = 1; i < 50; ++i) ranges += std::abs(lots.first[i] - lots.first[i - 1]);
  for (int n = 0; n < 20; ++n) {
    lots.read(20 + lots.next());
    if (n > 0) ranges += std::abs(lots.second[lots.second.size() - 1] - lots.second[lots.second.size() - 2]);
  }
  const Repeatability now = lots.fed.chart.repeatability();
  CHECK(now.degrees_of_freedom > first);
  CHECK(now.mean == doctest::Approx(20).epsilon(0.05));
  const double sigma = ranges / 68 / 1.1283791670955126;
  CHECK(now.variance == doctest::Approx(sigma * sigma));
}

TEST_CASE("an open alert ends with the lot, and what it suspects is not carried over") {
  TwoLots lots(307);
  Settings& settings = lots.settings;
  settings.charts[0].lots[1].from = hour(71);
  for (int n = 0; n < 20; ++n) lots.fed.read(16 + lots.next());
  REQUIRE(lots.fed.unstable());
  lots.fed.read(20);
  CHECK_FALSE(lots.fed.unstable());
  CHECK(lots.fed.findings.back().resolved_reason == "new_stretch");
  CHECK(lots.fed.chart.view().baseline.carried_over <= 51);
  CHECK(*lots.fed.chart.view().baseline.sd == doctest::Approx(1).epsilon(0.3));
}

TEST_CASE("with no more than a few readings in the lot before, the new lot learns from the fifth on") {
  Settings settings = mill(1800);
  settings.charts[0].lots.push_back({"2026-B", hour(3), {}});
  Fed fed(settings);
  Readings next(308);
  feed(fed, next, 2);
  for (int n = 1; n <= 8; ++n) {
    feed(fed, next, 1, 20);
    const ChartPoint point = fed.chart.view().points.back();
    CHECK(point.score.has_value() == (n + 1 >= 5));
    CHECK(point.upper.has_value() == (n >= 4));
  }
}
