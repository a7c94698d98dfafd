#include "core/pair/pair_chart.hpp"

#include "core/base/distributions.hpp"
#include "core/pair/deming.hpp"
#include "core/pair/drift_alarm.hpp"
#include "tests/core/pair/support.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
constexpr Instant at(std::int64_t hour) {
  return Instant{std::chrono::hours(hour)};
}

PairChart chart_of(const std::vector<Point>& points, int memory = 400) {
  PairChart chart(memory, 0);
  for (std::size_t i = 0; i < points.size(); ++i) chart.insert(points[i], at(static_cast<std::int64_t>(i)));
  return chart;
}

// Residual sum of squares of v about its least-squares line in w.
double rss(const std::vector<Point>& wv, std::size_t from, std::size_t to) {
  const Moments m(std::span<const Point>(wv).subspan(from, to - from));
  return m.syy - m.sxy * m.sxy / m.sxx;
}

struct Found {
  int before = 0;
  double evidence = 0;
};

// Every split's two lines fitted one by one.
Found split_by_split(const std::vector<Point>& points, double delta, int first = 4) {
  const Moments all(points);
  const DemingLine line = deming_line(all, delta);
  std::vector<Point> wv;
  double s_v = 0;
  for (const Point p : points) {
    const Point c = all.centred(p);
    wv.push_back({line.fitted(c), line.residual(c)});
    s_v += wv.back().y * wv.back().y;
  }
  const std::size_t n = points.size();
  Found best;
  double largest = -1;
  for (std::size_t k = static_cast<std::size_t>(std::max(4, first)); k + 3 <= n; ++k) {
    const double gain = s_v - rss(wv, 0, k) - rss(wv, k, n);
    if (gain <= largest) continue;
    largest = gain;
    const double m = static_cast<double>(n) - 5;
    const double f = (gain / 2) / ((s_v - gain) / m);
    best = {static_cast<int>(k), -std::log(f_tail(f, 2, m))};
  }
  return best;
}
}  // namespace

TEST_CASE("the pair score equals all splits fitted one by one") {
  std::mt19937_64 random(41);
  for (const std::size_t n : {7u, 8u, 20u, 150u})
    for (const double delta : {0.3, 1.0, 4.0}) {
      CAPTURE(n);
      CAPTURE(delta);
      const auto points = draw({9, 15, 0.1, 1.02, 0.05, 0.05}, n, random);
      const auto split = chart_of(points).best_split(delta);
      const Found slow = split_by_split(points, delta);
      REQUIRE(split);
      // At the last split looked at the start may be told later, see below.
      if (slow.before + 3 < static_cast<int>(n)) CHECK(split->before == slow.before);
      CHECK(split->before + split->after == static_cast<int>(n));
      CHECK_CLOSE(split->evidence, slow.evidence, 1e-8);
    }
}

TEST_CASE("older pairs as one block give the same scores at the splits that are left") {
  std::mt19937_64 random(42);
  auto points = draw({9, 15, 0.1, 1.02, 0.05, 0.05}, 200, random);
  for (std::size_t i = 170; i < points.size(); ++i) points[i].y += 0.2;
  const auto split = chart_of(points, 60).best_split(1);
  const Found slow = split_by_split(points, 1, 140);
  REQUIRE(split);
  CHECK(split->before == slow.before);
  CHECK_CLOSE(split->evidence, slow.evidence, 1e-8);
}

TEST_CASE("evidence and score are two ways to say the same") {
  for (const double h : {0.5, 2.0, 3.86, 6.0}) CHECK_CLOSE(score_of_evidence(evidence_of_score(h)), h, 1e-10);
  CHECK(score_of_evidence(0) == 0);
  CHECK(score_of_evidence(1e6) == 37.5);  // as far as a double tail goes
}

TEST_CASE("a step of two pair sds is found with its start") {
  std::mt19937_64 random(43);
  const double pair_sd = 0.02 * std::sqrt(2.0);
  auto points = draw({}, 80, random);
  for (std::size_t i = 60; i < points.size(); ++i) points[i].y += 3 * pair_sd;
  const auto split = chart_of(points).best_split(1);
  REQUIRE(split);
  CHECK(score_of_evidence(split->evidence) > 6);
  CHECK(std::abs(split->before - 60) <= 1);
  CHECK(split->started_between.first <= at(60));
  CHECK(split->started_between.last >= at(60));
  CHECK(std::abs(split->shift - 3 * pair_sd) < pair_sd);
}

TEST_CASE("the start of a large step is right although too few pairs for a line have come after it") {
  // The best split has three pairs after it; taken for the start it would put pairs from before the step into
  // the new stretch (in 285 of 300 simulated steps of 10 pair sds the start was one pair early, now 0).
  std::mt19937_64 random(50);
  for (const std::size_t after : {1u, 2u, 3u}) {
    CAPTURE(after);
    auto points = draw({}, 60 + after, random);
    for (std::size_t i = 60; i < points.size(); ++i) points[i].y += 0.3;
    const auto split = chart_of(points).best_split(1);
    REQUIRE(split);
    CHECK(split->before == 60);
    CHECK(split->started_at == at(60));
    CHECK(split->started_between.last == at(60));
  }
}

TEST_CASE("a proportional change is found although the mean residual hardly moves") {
  std::mt19937_64 random(44);
  auto points = draw({}, 120, random);
  for (std::size_t i = 60; i < points.size(); ++i) points[i].y += 0.03 * (points[i].x - 12);
  const auto split = chart_of(points).best_split(1);
  REQUIRE(split);
  CHECK(score_of_evidence(split->evidence) > 5);
  CHECK(std::abs(split->before - 60) <= 6);
}

TEST_CASE("too few pairs, no positive slope, equal pairs: no score, never a NaN") {
  std::mt19937_64 random(45);
  CHECK_FALSE(chart_of(draw({}, 6, random)).evidence(1));
  CHECK(chart_of(draw({}, 7, random)).evidence(1));
  CHECK_FALSE(chart_of(std::vector<Point>(10, Point{1, 2})).evidence(1));
  std::vector<Point> falling, exact;
  for (int i = 0; i < 10; ++i) {
    falling.push_back({1.0 * i, -1.0 * i});
    exact.push_back({0.1 * i, 0.1 * i + 0.3});
  }
  CHECK_FALSE(chart_of(falling).evidence(1));
  const auto on_a_line = chart_of(exact).evidence(1);
  REQUIRE(on_a_line);
  CHECK(*on_a_line < 1);  // rounding of the arithmetic is no change
}

TEST_CASE("results rounded to a coarse step do not signal for their rounding") {
  // The rounding step is half as large as the errors; before any scatter is seen S_v would be zero.
  std::mt19937_64 random(46);
  PairChart chart(400, 0.1);
  double largest = 0;
  for (int i = 0; i < 60; ++i) {
    Point p = Plant{9, 15, 0, 1, 0.01, 0.01}(random);
    p = {std::round(p.x * 10) / 10, std::round(p.y * 10) / 10};
    chart.insert(p, at(i));
    largest = std::max(largest, score_of_evidence(chart.evidence(1).value_or(0)));
  }
  CHECK(largest < 4);
}

TEST_CASE("a restart keeps the newest pairs only") {
  std::mt19937_64 random(47);
  const auto points = draw({}, 90, random);
  PairChart chart = chart_of(points, 50);
  chart.restart(20);
  CHECK(chart.pairs() == 20);
  const std::vector<Point> newest(points.end() - 20, points.end());
  CHECK(*chart.evidence(1) == *chart_of(newest).evidence(1));
}

TEST_CASE("the alarm: warning, then critical; a warning that is not confirmed ends") {
  std::mt19937_64 random(48);
  const Deltas deltas{1, 1.2, 0.8};
  PairChart chart = chart_of(draw({}, 60, random));
  DriftAlarm alarm({3.5, 5.5});
  int hour = 60, pairs = 0;
  std::vector<DriftAlarm::Step> steps;
  const auto add = [&](double shift) {
    Point p = Plant{}(random);
    p.y += shift;
    chart.insert(p, at(++hour));
    return alarm.step(chart, deltas);
  };
  while (!alarm.open() && ++pairs < 100) steps.push_back(add(0.045));
  REQUIRE(steps.back() == DriftAlarm::Step::warning);
  DriftAlarm forgiven = alarm;
  const PairChart at_warning = chart;

  while (alarm.open() == Severity::warning && ++pairs < 200) steps.push_back(add(0.045));
  CHECK(steps.back() == DriftAlarm::Step::critical);
  CHECK(std::abs((alarm.split().started_at - at(61)).count()) <= Duration(std::chrono::hours(6)).count());

  chart = at_warning;
  alarm = forgiven;
  int since = 0;
  DriftAlarm::Step last = DriftAlarm::Step::nothing;
  while (alarm.open() && ++since < 400) last = add(0);
  CHECK(last == DriftAlarm::Step::not_confirmed);
  CHECK(since >= 3);
}

TEST_CASE("a score counts only if it holds over the interval of lambda") {
  std::mt19937_64 random(49);
  // Campaigns of products at two levels and a wrong lambda: the wrong slope makes the change of product a
  // change of relation, the right one does not.
  std::vector<Point> points;
  for (int i = 0; i < 80; ++i) {
    Plant plant{i < 50 ? 11.9 : 12.4, i < 50 ? 12.1 : 12.6, 0, 1, 0.25, 0.25};
    points.push_back(plant(random));
  }
  const PairChart chart = chart_of(points);
  const double right = *chart.evidence(1), wrong = *chart.evidence(0.2);
  const auto smallest = DriftAlarm::evidence(chart, Deltas{0.2, 1, 0.1});
  REQUIRE(smallest);
  CHECK(*smallest <= right);
  CHECK(*smallest <= wrong);
}
