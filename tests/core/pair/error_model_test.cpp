#include "core/pair/error_model.hpp"

#include "core/pair/error_ratio.hpp"
#include "tests/core/pair/support.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
Repeatability standard(double level, double variance, double df) {
  return {{}, variance, df, level};
}

double likelihood(const ErrorModel& model, const std::vector<Repeatability>& standards) {
  double sum = 0;
  for (const Repeatability& s : standards) {
    const double v = model.variance_at(s.mean);
    sum -= s.degrees_of_freedom / 2 * (std::log(v) + s.variance / v);
  }
  return sum;
}
}  // namespace

TEST_CASE(
    "one parameter: the pool by degrees of freedom, of variances or of squared coefficients of variation") {
  const std::vector<Repeatability> standards{standard(10, 0.01, 10), standard(20, 0.09, 30),
                                             standard(0, 5, 0)};
  const ErrorModel constant = fit_error_model(ErrorGrowth::constant, standards);
  CHECK_CLOSE(constant.variance_at(3), (0.1 + 2.7) / 40, 1e-14);
  CHECK_CLOSE(constant.degrees_of_freedom_at(3), 40, 1e-12);
  const ErrorModel proportional = fit_error_model(ErrorGrowth::proportional, standards);
  CHECK_CLOSE(proportional.relative, (10 * 0.01 / 100 + 30 * 0.09 / 400) / 40, 1e-14);
  CHECK_CLOSE(proportional.variance_at(-5), 25 * proportional.relative, 1e-14);
  CHECK_CLOSE(proportional.degrees_of_freedom_at(7), 40, 1e-12);
  CHECK(proportional.at_zero == 0.0);
}

TEST_CASE("two levels determine the mixed model exactly") {
  // a^2 = 0.01, b^2 = 0.0001.
  const std::vector<Repeatability> standards{standard(10, 0.02, 12), standard(30, 0.1, 25)};
  const ErrorModel model = fit_error_model(ErrorGrowth::mixed, standards);
  CHECK_CLOSE(model.at_zero, 0.01, 1e-11);
  CHECK_CLOSE(model.relative, 0.0001, 1e-11);
  // At a standard's own level all that is known comes from that standard.
  CHECK_CLOSE(model.degrees_of_freedom_at(10), 12, 1e-9);
  CHECK_CLOSE(model.degrees_of_freedom_at(30), 25, 1e-9);
}

TEST_CASE("parts that the standards speak against are held at zero") {
  const ErrorModel falling =
      fit_error_model(ErrorGrowth::mixed, std::vector{standard(10, 0.09, 20), standard(30, 0.01, 60)});
  CHECK(falling.relative == 0.0);
  CHECK_CLOSE(falling.at_zero, 0.03, 1e-13);
  const ErrorModel steep =
      fit_error_model(ErrorGrowth::mixed, std::vector{standard(10, 0.01, 20), standard(30, 0.18, 60)});
  CHECK(steep.at_zero == 0.0);
  CHECK_CLOSE(steep.relative, (20 * 1e-4 + 60 * 2e-4) / 80, 1e-13);
  // What is held at zero is uncertain all the same.
  CHECK(falling.degrees_of_freedom_at(30) < 80);
}

TEST_CASE("the mixed model is more likely than any other near it, and than both one-parameter ones") {
  std::mt19937_64 random(31);
  for (int run = 0; run < 200; ++run) {
    std::vector<Repeatability> standards;
    for (int i = 0; i < 4; ++i) {
      const double level = std::uniform_real_distribution<double>(1, 40)(random);
      const double df = 3.0 + i * 5;
      const double s2 =
          (0.02 + 0.0001 * level * level) * std::chi_squared_distribution<double>(df)(random) / df;
      standards.push_back(standard(level, s2, df));
    }
    const ErrorModel best = fit_error_model(ErrorGrowth::mixed, standards);
    if (!best.exists()) continue;
    const double reached = likelihood(best, standards);
    for (const ErrorGrowth growth : {ErrorGrowth::constant, ErrorGrowth::proportional})
      CHECK(reached >= likelihood(fit_error_model(growth, standards), standards) - 1e-10);
    for (double a : {0.8, 0.99, 1.01, 1.2, 3.0})
      for (double b : {0.8, 0.99, 1.01, 1.2, 3.0}) {
        ErrorModel other = best;
        other.at_zero = best.at_zero * a + (a > 1 ? 1e-6 : 0);
        other.relative = best.relative * b + (b > 1 ? 1e-9 : 0);
        if (other.variance_at(1) > 0) CHECK(reached >= likelihood(other, standards) - 1e-10);
      }
  }
}

TEST_CASE("its degrees of freedom are those of the variance it tells: simulated") {
  std::mt19937_64 random(32);
  const double level = 15, truth = 0.01 + 0.0002 * level * level;
  double sum = 0, squares = 0, df = 0;
  constexpr int runs = 4000;
  for (int i = 0; i < runs; ++i) {
    std::vector<Repeatability> standards;
    for (const double at : {5.0, 12.0, 30.0})
      standards.push_back(standard(
          at, (0.01 + 0.0002 * at * at) * std::chi_squared_distribution<double>(60)(random) / 60, 60));
    const ErrorModel model = fit_error_model(ErrorGrowth::mixed, standards);
    const double v = model.variance_at(level) / truth;
    sum += v / runs;
    squares += v * v / runs;
    df += model.degrees_of_freedom_at(level) / runs;
  }
  // Relative variance of a variance on df degrees of freedom: 2 / df; its simulated value is known to 2.2 %.
  CHECK(std::abs(sum - 1) < 0.01);
  CHECK(std::abs((squares - sum * sum) / (2 / df) - 1) < 0.1);
}

TEST_CASE("why there is no model") {
  const auto reason = [](ErrorGrowth growth, std::vector<Repeatability> standards) {
    return std::string(fit_error_model(growth, standards).reason);
  };
  CHECK(reason(ErrorGrowth::mixed, {}) == "repeatability_not_known");
  CHECK(reason(ErrorGrowth::proportional, {standard(0, 1, 10)}) == "standard_at_level_zero");
  CHECK(reason(ErrorGrowth::mixed, {standard(10, 1, 10)}) == "standards_at_one_level");
  CHECK(reason(ErrorGrowth::mixed, {standard(10, 1, 10), standard(11, 1, 10)}) == "standards_at_one_level");
  CHECK(reason(ErrorGrowth::mixed, {standard(10, 1, 10), standard(20, 1, 0)}) == "standards_at_one_level");
  CHECK(reason(ErrorGrowth::mixed, {standard(0, 1, 10), standard(11, 1, 10)}).empty());
}

TEST_CASE(
    "lambda of growing errors: the same at every level when proportional, at the stated level when mixed") {
  const std::vector<Repeatability> x{standard(10, 0.04, 20), standard(30, 0.36, 20)};
  const std::vector<Repeatability> y{standard(10, 0.02, 20), standard(30, 0.10, 20)};
  const double level = mean_level(x, y);
  CHECK_CLOSE(level, 20, 1e-14);
  const ErrorRatio mixed =
      ratio_of(fit_error_model(ErrorGrowth::mixed, x), fit_error_model(ErrorGrowth::mixed, y), level);
  REQUIRE(mixed.known);
  CHECK_CLOSE(mixed.lambda, 0.16 / 0.05, 1e-10);
  CHECK_CLOSE(mixed.x_variance_at(30), 0.36, 1e-10);
  const ErrorModel proportional = fit_error_model(ErrorGrowth::proportional, x);
  const ErrorRatio same = ratio_of(proportional, fit_error_model(ErrorGrowth::proportional, y), 7);
  CHECK_CLOSE(same.lambda, ratio_of(proportional, same.y_model, 70).lambda, 1e-13);
  const ErrorRatio none =
      ratio_of(fit_error_model(ErrorGrowth::mixed, std::span(x).first(1)), mixed.y_model, level);
  CHECK_FALSE(none.known);
  CHECK(none.reason == "standards_at_one_level");
}
