#include "core/pair/window_fit.hpp"

#include "core/pair/error_ratio.hpp"
#include "core/pair/scatter.hpp"
#include "tests/core/pair/support.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
ErrorModel proportional(double cv, double df) {
  ErrorModel model;
  model.growth = ErrorGrowth::proportional;
  model.at_zero = 0;
  model.relative = cv * cv;
  if (df > 0) model.relative_variance = 2 * std::pow(cv, 4) / df;
  return model;
}

ErrorRatio proportional_ratio(double cv_x, double cv_y, double df = 40) {
  return ratio_of(proportional(cv_x, df), proportional(cv_y, df), 10);
}

ErrorRatio constant_ratio(double lambda) {
  ErrorRatio ratio;
  ratio.known = true;
  ratio.lambda = ratio.low = ratio.high = lambda;
  return ratio;
}

// Errors proportional to the level, over 1:20.
Point proportional_pair(std::mt19937_64& random, double cv = 0.05) {
  std::normal_distribution<double> error;
  const double truth = std::uniform_real_distribution<double>(1, 20)(random);
  return {truth * (1 + cv * error(random)), (0.2 + 1.05 * truth) * (1 + cv * error(random))};
}

Window window_of(const std::vector<Point>& points, const std::vector<WindowEntry>& entries = {}) {
  Window window(static_cast<int>(points.size()), std::nullopt);
  for (std::size_t i = 0; i < points.size(); ++i)
    window.insert(points[i], entries.empty() ? WindowEntry{} : entries[i]);
  return window;
}

std::vector<Point> drawn(std::size_t n, std::mt19937_64& random) {
  std::vector<Point> points;
  for (std::size_t i = 0; i < n; ++i) points.push_back(proportional_pair(random));
  return points;
}

WindowEntry replicated(int x, int y) {
  return {{}, 0, 1.0 / x, 1.0 / y};
}
}  // namespace

TEST_CASE("which fit: constant errors and equal replicates Deming, all else weighted") {
  std::mt19937_64 random(61);
  const auto points = drawn(30, random);
  const Window single = window_of(points);
  const Window doubled = window_of(points, std::vector<WindowEntry>(30, replicated(2, 3)));
  std::vector<WindowEntry> unequal(30, replicated(1, 1));
  unequal[7] = replicated(2, 1);
  const Window mixed = window_of(points, unequal);
  const auto method = [](const Window& window, const ErrorRatio& ratio, FitMethod asked = FitMethod::deming) {
    const WindowFit fit = fit_window(window, ratio, asked);
    REQUIRE(fit.exists());
    return fit.method;
  };
  CHECK(method(single, constant_ratio(1)) == LineMethod::deming);
  CHECK(method(doubled, constant_ratio(1)) == LineMethod::deming);
  CHECK(method(mixed, constant_ratio(1)) == LineMethod::york);
  CHECK(method(single, proportional_ratio(0.05, 0.05)) == LineMethod::york);
  CHECK(method(doubled, proportional_ratio(0.05, 0.05), FitMethod::weighted_deming) ==
        LineMethod::weighted_deming);
  CHECK(method(mixed, proportional_ratio(0.05, 0.05), FitMethod::weighted_deming) == LineMethod::york);
}

TEST_CASE("unequal numbers of replicates: York's line with the variances of the means") {
  std::mt19937_64 random(62);
  const auto points = draw({9, 15, 0.5, 0.9, 0.4, 0.3}, 40, random);
  std::vector<WindowEntry> entries;
  std::vector<Point> variances;
  for (int i = 0; i < 40; ++i) {
    entries.push_back(replicated(1 + i % 3, 1 + i % 2));
    variances.push_back({1.7 / (1 + i % 3), 1.0 / (1 + i % 2)});
  }
  const WindowFit fit = fit_window(window_of(points, entries), constant_ratio(1.7));
  const WeightedLine york = york_line(points, variances);
  REQUIRE((fit.exists() && york.exists()));
  CHECK_CLOSE(fit.line.slope, york.line.slope, 1e-11);
  CHECK_CLOSE(fit.line.difference_at(11), york.line.difference_at(11), 1e-9);
  CHECK_CLOSE(fit.analytic.slope, york.covariance.slope * york.scale(), 1e-9);
  CHECK_CLOSE(fit.scale, york.scale(), 1e-10);
}

TEST_CASE("a pair that becomes equal replicates again goes back to Deming, to the bit") {
  std::mt19937_64 random(63);
  const auto points = drawn(30, random);
  Window window(10, std::nullopt), plain(10, std::nullopt);
  for (int i = 0; i < 30; ++i) {
    window.insert(points[static_cast<std::size_t>(i)], i == 5 ? replicated(2, 1) : WindowEntry{});
    plain.insert(points[static_cast<std::size_t>(i)], {});
  }
  const WindowFit a = fit_window(window, constant_ratio(2)), b = fit_window(plain, constant_ratio(2));
  CHECK(a.line.slope == b.line.slope);
  CHECK(a.jackknife.slope == b.jackknife.slope);
}

TEST_CASE("the scatter grows with the level, and studentised residuals have unit variance all along") {
  std::mt19937_64 random(64);
  for (const FitMethod asked : {FitMethod::deming, FitMethod::weighted_deming}) {
    double low = 0, high = 0, new_low = 0, new_high = 0;
    int lows = 0, highs = 0;
    for (int run = 0; run < 60; ++run) {
      const Window window = window_of(drawn(60, random));
      const WindowFit fit = fit_window(window, proportional_ratio(0.05, 0.05), asked);
      REQUIRE(fit.exists());
      CHECK_CLOSE(fit.residual_variance_at(20) / fit.residual_variance_at(10), 4, 0.1);
      for (const Point p : window.points()) {
        const double r = studentised_residual(fit, p, {1, 1}, 0);
        const Point next = proportional_pair(random);
        const double q = prediction_residual(fit, next, {1, 1}, 0);
        (p.x < 6 ? low : high) += r * r;
        ++(p.x < 6 ? lows : highs);
        (next.x < 6 ? new_low : new_high) += q * q;
      }
    }
    // 900 and 2,700 squares of unit variance and kurtosis 3: relative sd of their means 0.047 and 0.027.
    CHECK(std::abs(low / lows - 1) < 0.15);
    CHECK(std::abs(high / highs - 1) < 0.09);
    CHECK(std::abs(new_low / lows - 1) < 0.2);
    CHECK(std::abs(new_high / highs - 1) < 0.12);
  }
}

TEST_CASE("scatter against growing repeatability, and the weighted reliability ratio") {
  std::mt19937_64 random(65);
  const Window window = window_of(drawn(200, random));
  double ratio_of_york = 0;
  for (const FitMethod asked : {FitMethod::deming, FitMethod::weighted_deming}) {
    const ErrorRatio ratio = proportional_ratio(0.05, 0.05);
    const WindowFit fit = fit_window(window, ratio, asked);
    const auto scatter = describe_scatter(fit, ratio, {1, 1});
    REQUIRE(scatter);
    CHECK(scatter->variance_ratio > 0.75);
    CHECK(scatter->variance_ratio < 1.3);
    CHECK_CLOSE(scatter->variance_ratio, std::pow(scatter->observed_sd / scatter->expected_sd, 2), 1e-12);
    // Both fits tell the same story; they weigh a little differently.
    if (ratio_of_york > 0) CHECK_CLOSE(scatter->variance_ratio, ratio_of_york, 0.05);
    ratio_of_york = scatter->variance_ratio;
    const RangeView range = describe_range(fit, ratio, {1, 1}, std::vector<double>{3, 12});
    CHECK(range.reliability_ratio > 0.95);
    CHECK(range.reliability_ratio < 1);
    CHECK(range.covers_levels);

    // Half the errors claimed: four times the scatter they explain.
    const ErrorRatio half = proportional_ratio(0.025, 0.025);
    const auto excess = describe_scatter(fit_window(window, half, asked), half, {1, 1});
    CHECK_CLOSE(excess->variance_ratio, 4 * scatter->variance_ratio, 1e-9);
    CHECK(excess->p < 1e-6);
  }
}

TEST_CASE("with constant errors the weighted reliability ratio is Fuller's") {
  std::mt19937_64 random(66);
  auto points = draw({9, 15, 0.5, 0.9, 0.4, 0.3}, 50, random);
  ErrorRatio ratio = constant_ratio(16.0 / 9);
  ratio.variances_known = true;
  ratio.x.variance = 0.16;
  ratio.y.variance = 0.09;
  const Window plain = window_of(points);
  WindowFit deming = fit_window(plain, ratio);
  // One pair of two replicates among so many hardly moves it.
  std::vector<WindowEntry> entries(50, WindowEntry{});
  entries[20] = replicated(2, 2);
  const Window unequal = window_of(points, entries);
  const WindowFit york = fit_window(unequal, ratio);
  REQUIRE(york.method == LineMethod::york);
  const std::vector<double> none;
  CHECK_CLOSE(describe_range(york, ratio, unequal.error_shares(), none).reliability_ratio,
              describe_range(deming, ratio, {1, 1}, none).reliability_ratio, 5e-3);
  CHECK_CLOSE(describe_scatter(york, ratio, unequal.error_shares())->variance_ratio,
              describe_scatter(deming, ratio, {1, 1})->variance_ratio, 0.1);
}

TEST_CASE("the slope at another lambda is that of a fit at it") {
  std::mt19937_64 random(67);
  const Window window = window_of(drawn(40, random));
  for (const FitMethod asked : {FitMethod::deming, FitMethod::weighted_deming}) {
    const auto there = slope_at_lambda(window, proportional_ratio(0.05, 0.05), asked, 4);
    REQUIRE(there);
    CHECK_CLOSE(*there, fit_window(window, proportional_ratio(0.10, 0.05), asked).line.slope, 1e-10);
  }
  const auto constant = slope_at_lambda(window, constant_ratio(1), FitMethod::deming, 4);
  CHECK(*constant == fit_window(window, constant_ratio(4)).line.slope);
}

TEST_CASE("a bare lambda is enough for weighted fits; what it leaves open is in the standard error") {
  std::mt19937_64 random(68);
  const Window window = window_of(drawn(60, random));
  const ErrorRatio bare = given_ratio({ErrorSource::given_lambda, 0, 0, 1}, ErrorGrowth::proportional);
  const WindowFit fit = fit_window(window, bare), known = fit_window(window, proportional_ratio(0.05, 0.05));
  REQUIRE((fit.exists() && known.exists()));
  CHECK_CLOSE(fit.line.slope, known.line.slope, 1e-10);
  CHECK_FALSE(describe_scatter(fit, bare, {1, 1}));
  // An estimated ratio is uncertain, a given one counts as it is.
  CHECK(known.jackknife.slope > fit.jackknife.slope);
  CHECK_CLOSE(fit.residual_variance, known.residual_variance, 1e-9);
}

TEST_CASE("a level at or below zero leaves no line with proportional errors, and says so") {
  std::mt19937_64 random(69);
  auto points = drawn(20, random);
  points.push_back({-3, -3});
  for (const FitMethod asked : {FitMethod::deming, FitMethod::weighted_deming})
    CHECK(fit_window(window_of(points), proportional_ratio(0.05, 0.05), asked).reason ==
          "level_not_positive");
}
