// Weights of pairs, and what the pair chart makes of them and of an established line, each against sums done
// split by split.
#include "core/pair/pair_weight.hpp"

#include "core/base/distributions.hpp"
#include "core/pair/deming.hpp"
#include "core/pair/pair_chart.hpp"
#include "tests/core/pair/harrow_mill.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
constexpr Instant at(std::size_t hour) {
  return Instant{std::chrono::hours(static_cast<std::int64_t>(hour))};
}

Pair pair_at(double x, double y, int x_replicates = 1, int y_replicates = 1) {
  return {"S", Instant{}, x, y, x_replicates, y_replicates};
}

ErrorRatio proportional(double lambda = 1) {
  ErrorRatio ratio = equal_errors();
  ratio.lambda = lambda;
  ratio.x_model.growth = ratio.y_model.growth = ErrorGrowth::proportional;
  ratio.x_model.at_zero = ratio.y_model.at_zero = 0;
  ratio.x_model.relative = lambda * 1e-4;
  ratio.y_model.relative = 1e-4;
  ratio.level = 12;
  return ratio;
}

struct Weighed {
  double w = 0, v = 0, weight = 1;
};

// Weighted residual sum of squares of v about its own line in w.
double rss(const std::vector<Weighed>& all, std::size_t from, std::size_t to) {
  double s = 0, mw = 0, mv = 0, ww = 0, wv = 0, vv = 0;
  for (std::size_t i = from; i < to; ++i) {
    s += all[i].weight;
    mw += all[i].weight * all[i].w;
    mv += all[i].weight * all[i].v;
  }
  mw /= s;
  mv /= s;
  for (std::size_t i = from; i < to; ++i) {
    const double a = all[i].w - mw, b = all[i].v - mv;
    ww += all[i].weight * a * a;
    wv += all[i].weight * a * b;
    vv += all[i].weight * b * b;
  }
  return vv - wv * wv / ww;
}

double square_sum(const std::vector<Weighed>& all, std::size_t from, std::size_t to) {
  double sum = 0;
  for (std::size_t i = from; i < to; ++i) sum += all[i].weight * all[i].v * all[i].v;
  return sum;
}

struct Found {
  int before = 0;
  double evidence = 0;
};

Found by_own_line(const std::vector<Point>& points, const std::vector<double>& weights, double delta) {
  double s = 0, mx = 0, my = 0;
  for (std::size_t i = 0; i < points.size(); ++i) {
    s += weights[i];
    mx += weights[i] * points[i].x;
    my += weights[i] * points[i].y;
  }
  mx /= s;
  my /= s;
  Moments sums;
  sums.n = static_cast<int>(points.size());
  for (std::size_t i = 0; i < points.size(); ++i) {
    const double a = points[i].x - mx, b = points[i].y - my;
    sums.sxx += weights[i] * a * a;
    sums.sxy += weights[i] * a * b;
    sums.syy += weights[i] * b * b;
  }
  const double slope = deming_line(sums, delta).slope;
  std::vector<Weighed> all;
  for (std::size_t i = 0; i < points.size(); ++i) {
    const double a = points[i].x - mx, b = points[i].y - my;
    all.push_back({delta * a + slope * b, b - slope * a, weights[i]});
  }
  const double whole = square_sum(all, 0, all.size());
  Found best;
  double least = 1e300;
  for (std::size_t k = 4; k + 3 <= all.size(); ++k) {
    const double inside = rss(all, 0, k) + rss(all, k, all.size());
    if (inside >= least) continue;
    least = inside;
    const double m = static_cast<double>(all.size()) - 5;
    best = {static_cast<int>(k), -std::log(f_tail((whole - inside) / 2 / (inside / m), 2, m))};
  }
  return best;
}

Found by_established_line(const std::vector<Point>& points, EstablishedLine line, double delta,
                          std::size_t first) {
  std::vector<Weighed> all;
  for (const Point p : points)
    all.push_back(
        {delta * p.x + line.slope * (p.y - line.intercept), p.y - line.intercept - line.slope * p.x});
  const double whole = square_sum(all, 0, all.size());
  Found best;
  double least = 1e300;
  for (std::size_t k = first; k + 3 <= all.size(); ++k) {
    const double inside = square_sum(all, 0, k) + rss(all, k, all.size());
    if (inside >= least) continue;
    least = inside;
    const double m = static_cast<double>(all.size()) - 3;
    best = {static_cast<int>(k), -std::log(f_tail((whole - inside) / 2 / (inside / m), 2, m))};
  }
  return best;
}

PairChart against(EstablishedLine line, const std::vector<Point>& points, int memory = 400) {
  PairChart chart(memory, 0, line);
  for (std::size_t i = 0; i < points.size(); ++i) chart.insert(points[i], at(i));
  return chart;
}
}  // namespace

TEST_CASE("single results weigh 1 exactly while the errors are constant") {
  ErrorRatio ratio = equal_errors();
  for (const double lambda : {0.1, 0.37, 1.0, 1.9, 3.0}) {
    ratio.lambda = lambda;
    CHECK(weight_of(pair_at(11.3, 11.2), ratio) == 1);
  }
}

TEST_CASE("the weight goes with the inverse variance at the pair's level as measured") {
  const ErrorRatio ratio = proportional(2);
  CHECK_CLOSE(level_of(pair_at(9, 12), 2), 11, 1e-15);
  CHECK_CLOSE(weight_of(pair_at(9, 12), ratio), 12.0 * 12 / (11.0 * 11), 1e-12);
  CHECK_CLOSE(weight_of(pair_at(24, 24), ratio) / weight_of(pair_at(8, 8), ratio), 1.0 / 9, 1e-12);
  CHECK(weight_of(pair_at(0, 0), ratio) == doctest::Approx(1e6));
}

TEST_CASE("replicates enter the weight by what they leave of the difference's variance") {
  ErrorRatio ratio = equal_errors();
  ratio.lambda = 2;  // var(y - x) = 1 + 2 of single results, 1/2 + 2/4 of these means
  CHECK_CLOSE(weight_of(pair_at(12, 12, 4, 2), ratio), 3, 1e-15);
  CHECK_CLOSE(weight_of(pair_at(12, 12, 4, 4), ratio), 4, 1e-15);
}

TEST_CASE("the weighted pair score equals all weighted splits fitted one by one") {
  std::mt19937_64 random(71);
  std::uniform_real_distribution<double> any(0.2, 3);
  for (const std::size_t n : {7u, 20u, 150u})
    for (const double delta : {0.4, 1.0, 2.5}) {
      CAPTURE(n);
      CAPTURE(delta);
      const auto points = draw({9, 15, 0.1, 1.02, 0.05, 0.05}, n, random);
      std::vector<double> weights;
      PairChart chart(400, 0);
      for (std::size_t i = 0; i < n; ++i) {
        weights.push_back(any(random));
        chart.insert(points[i], at(i), 0, weights.back());
      }
      const Found slow = by_own_line(points, weights, delta);
      const auto split = chart.best_split(delta);
      REQUIRE(split);
      CHECK_CLOSE(split->evidence, slow.evidence, 1e-8);
      if (slow.before + 3 < static_cast<int>(n)) CHECK(split->before == slow.before);
    }
}

TEST_CASE("equal weights change nothing, of a power of two not even a bit") {
  std::mt19937_64 random(72);
  const auto points = draw({}, 120, random);
  PairChart plain(50, 0), fours(50, 0), threes(50, 0);
  for (std::size_t i = 0; i < points.size(); ++i) {
    plain.insert(points[i], at(i));
    fours.insert(points[i], at(i), 0, 4);
    threes.insert(points[i], at(i), 0, 3);
  }
  CHECK(*plain.evidence(1) == *fours.evidence(1));
  CHECK(plain.best_split(1)->shift == fours.best_split(1)->shift);
  CHECK_CLOSE(*plain.evidence(1), *threes.evidence(1), 1e-8);
}

TEST_CASE("the score against an established line equals all splits done one by one") {
  std::mt19937_64 random(73);
  const EstablishedLine line{0.1, 1.02};
  for (const std::size_t n : {7u, 8u, 30u, 200u})
    for (const double delta : {0.3, 1.0, 4.0}) {
      CAPTURE(n);
      CAPTURE(delta);
      const auto points = draw({9, 15, 0.1, 1.02, 0.05, 0.05}, n, random);
      CHECK_CLOSE(*against(line, points).evidence(delta),
                  by_established_line(points, line, delta, 0).evidence, 1e-8);
      if (n == 200)
        CHECK_CLOSE(*against(line, points, 60).evidence(delta),
                    by_established_line(points, line, delta, 140).evidence, 1e-8);
    }
}

TEST_CASE(
    "a relation that is off the established line from the first pair is found; its own line knows nothing of "
    "it") {
  std::mt19937_64 random(74);
  const auto points = draw({9, 15, 0.08, 1, 0.02, 0.02}, 40, random);
  const PairChart chart = against({}, points);
  const auto split = chart.best_split(1);
  REQUIRE(split);
  CHECK(score_of_evidence(split->evidence) > 6);
  CHECK(split->before <= 2);
  CHECK(split->shift == doctest::Approx(0.08).epsilon(0.2));
  PairChart own(400, 0);
  for (std::size_t i = 0; i < points.size(); ++i) own.insert(points[i], at(i));
  CHECK(score_of_evidence(*own.evidence(1)) < 3.5);
}

TEST_CASE(
    "after a change the chart asks by the pairs' own line, in a new stretch by the established one again") {
  std::mt19937_64 random(75);
  const auto points = draw({9, 15, 0.08, 1, 0.02, 0.02}, 40, random);
  PairChart chart = against({}, points);
  CHECK(chart.against_established_line());
  chart.restart(30);
  CHECK_FALSE(chart.against_established_line());
  PairChart own(400, 0);
  for (std::size_t i = 10; i < points.size(); ++i) own.insert(points[i], at(i));
  CHECK(*chart.evidence(1) == *own.evidence(1));
  chart.begin_stretch();
  CHECK(chart.pairs() == 0);
  CHECK(chart.against_established_line());
}
