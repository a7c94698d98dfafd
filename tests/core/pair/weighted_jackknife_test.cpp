#include "core/pair/weighted_jackknife.hpp"

#include "core/pair/jackknife.hpp"
#include "tests/core/pair/support.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
struct Case {
  std::vector<Point> points, shares;
  ErrorLaw law;

  [[nodiscard]] WeightedPairs pairs() const {
    const Moments m(points);
    return {points, shares, law, {m.mean_x(), m.mean_x() + m.mean_difference()}};
  }
  [[nodiscard]] WeightedLine line() const {
    return weighted_line(pairs(), deming_line(Moments(points), 1 / law.lambda).slope);
  }
};

Case drawn(bool common, std::size_t n, std::mt19937_64& random) {
  Case c;
  std::normal_distribution<double> error;
  std::uniform_real_distribution<double> level(1, 20);
  for (std::size_t i = 0; i < n; ++i) {
    const double truth = level(random), sd = std::sqrt(0.01 + 0.0025 * truth * truth);
    c.points.push_back({truth + sd * error(random), 0.3 + 1.1 * truth + sd * error(random)});
    c.shares.push_back(common ? Point{1, 1} : Point{1.0 / (1 + static_cast<int>(i % 3)), 1});
  }
  c.law = weighted_deming_law(1.3);
  if (common) return c;
  c.law.common_level = false;
  c.law.x.growth = c.law.y.growth = ErrorGrowth::mixed;
  c.law.x.at_zero = c.law.y.at_zero = 0.01;
  c.law.x.relative = c.law.y.relative = 0.0025;
  c.law.lambda = 1;
  return c;
}

// Largest relative difference of the two standard errors and of those of the line at both ends.
double apart(const LineCovariance& a, const LineCovariance& b, double offset) {
  double most = 0;
  for (const double at : {-offset, 0.0, offset})
    most = std::max(most, std::abs(std::sqrt(a.difference_at(at) / b.difference_at(at)) - 1));
  return std::max(most, std::abs(std::sqrt(a.slope / b.slope) - 1));
}
}  // namespace

TEST_CASE("the quick jackknife of a weighted line is as good as n refits") {
  std::mt19937_64 random(51);
  for (const auto& [n, allowed] :
       {std::pair{6u, 1e-2}, {10u, 1e-2}, {20u, 2e-3}, {50u, 2e-4}, {200u, 5e-5}}) {
    double worst = 0;
    for (int run = 0; run < 40; ++run) {
      const Case c = drawn(run % 2 == 0, n, random);
      const WeightedLine line = c.line();
      if (!line.exists()) continue;
      const auto quick = weighted_errors(c.pairs(), line);
      const auto slow = jackknife_by_refits(c.pairs(), line);
      if (!quick || !slow) continue;
      worst = std::max(worst, apart(quick->jackknife, *slow, 9));
    }
    MESSAGE(n << " pairs: standard errors at most " << worst << " off");
    CHECK(worst > 0.0);
    CHECK(worst < allowed);
  }
}

TEST_CASE("weighted Deming of peak flow: jackknife standard errors against an independent computation") {
  // 17 refits of 300 passes, in another language outside this project.
  struct Row {
    double lambda, se_slope, se_intercept;
  };
  for (const Row& row : {Row{0.5, 0.2460869673941, 115.6422163928}, Row{1, 0.2682721330374, 124.9051769708},
                         Row{2, 0.2849877516815, 131.7195279602}}) {
    CAPTURE(row.lambda);
    Case c{read_points("pefr_1986.csv"), {}, weighted_deming_law(row.lambda)};
    c.shares.assign(c.points.size(), {1, 1});
    const WeightedLine line = c.line();
    const auto slow = jackknife_by_refits(c.pairs(), line);
    REQUIRE(slow);
    CHECK_CLOSE(std::sqrt(slow->slope), row.se_slope, 1e-8);
    CHECK_CLOSE(std::sqrt(slow->difference_at(-line.line.mean_x)), row.se_intercept, 1e-8);
    const auto quick = weighted_errors(c.pairs(), line);
    REQUIRE(quick);
    CHECK_CLOSE(std::sqrt(quick->jackknife.slope), row.se_slope, 1e-3);
    CHECK_CLOSE(std::sqrt(quick->jackknife.difference_at(-line.line.mean_x)), row.se_intercept, 1e-3);
  }
}

TEST_CASE("with constant errors it is the jackknife of the Deming line, and so is what lambda adds") {
  std::mt19937_64 random(52);
  Case c{draw({9, 15, 0.5, 0.9, 0.3, 0.2}, 100, random), std::vector<Point>(100, {1, 1}), {}};
  c.law.lambda = c.law.x.at_zero = 2.25;
  const WeightedLine line = c.line();
  const auto errors = weighted_errors(c.pairs(), line);
  REQUIRE(errors);
  const Moments m(c.points);
  const DemingLine deming = deming_line(m, 1 / 2.25);
  const auto exact = jackknife_covariance(c.points, m, deming);
  CHECK(apart(errors->jackknife, *exact, 3) < 2e-4);
  CHECK_CLOSE(errors->of_log_ratio.slope, slope_variance_from_ratio(m, deming, 1), 1e-3);
  CHECK(errors->of_log_ratio.mean < 1e-12);
}

TEST_CASE("what an uncertain lambda adds is what the line does when lambda changes") {
  std::mt19937_64 random(53);
  for (const bool common : {true, false}) {
    const Case c = drawn(common, 60, random);
    const WeightedLine line = c.line();
    const auto errors = weighted_errors(c.pairs(), line);
    REQUIRE(errors);
    Case up = c, down = c;
    const double h = 1e-3;
    for (auto* changed : {&up, &down}) {
      const double factor = std::exp(changed == &up ? h : -h);
      changed->law.lambda *= factor;
      changed->law.x.at_zero *= factor;
      changed->law.x.relative *= factor;
    }
    const double turn = (up.line().line.slope - down.line().line.slope) / (2 * h);
    CHECK_CLOSE(errors->of_log_ratio.slope, turn * turn, 1e-2);
  }
}

TEST_CASE("a pair that carries nearly all of the spread is refitted without") {
  std::mt19937_64 random(54);
  Case c = drawn(false, 30, random);
  c.points.push_back({4000, 4200});
  c.shares.push_back({1, 1});
  for (ErrorModel* model : {&c.law.x, &c.law.y}) model->relative = 0;
  const WeightedLine line = c.line();
  const auto quick = weighted_errors(c.pairs(), line);
  const auto slow = jackknife_by_refits(c.pairs(), line);
  REQUIRE((quick && slow));
  CHECK(apart(quick->jackknife, *slow, 9) < 1e-2);
}

TEST_CASE("an exact line has no standard error, and where one pair decides there is no jackknife") {
  Case exact{{{1, 2}, {2, 4}, {3, 6}, {5, 10}}, std::vector<Point>(4, {1, 1}), weighted_deming_law(1)};
  const auto none = weighted_errors(exact.pairs(), exact.line());
  REQUIRE(none);
  CHECK(std::sqrt(none->jackknife.slope) < 1e-9);
  Case one{{{1, 1}, {1, 1}, {1, 1}, {2, 2.5}}, std::vector<Point>(4, {1, 1}), weighted_deming_law(1)};
  const WeightedLine line = one.line();
  REQUIRE(line.exists());
  CHECK_FALSE(weighted_errors(one.pairs(), line));
}
