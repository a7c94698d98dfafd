#include "core/pair/bias.hpp"

#include "core/base/distributions.hpp"
#include "core/pair/jackknife.hpp"
#include "tests/core/pair/support.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
struct OzoneLevel {
  double level, bias, se, low, high;
  Position wide, tight;
};
// Computed outside this project from the covariance of an orthogonal distance regression; margins are
// max(1, 0.5 % of level) and max(0.3, 0.1 % of level).
constexpr OzoneLevel kOzone[] = {{50, -0.1576415122525, 0.2166171308895, -0.5239246720059, 0.2086416475009,
                                  Position::inside, Position::across},
                                 {100, -0.05164359480424, 0.2014078599419, -0.3922090294758, 0.2889218398673,
                                  Position::inside, Position::across},
                                 {500, 0.796339744782, 0.1515023009947, 0.5401608299825, 1.052518659581,
                                  Position::inside, Position::above},
                                 {900, 1.644323084368, 0.2538760717942, 1.215037877881, 2.073608290855,
                                  Position::inside, Position::above}};
}  // namespace

TEST_CASE("NIST's ozone monitors: bias, interval and statement at four levels") {
  const auto points = read_points("norris_ozone.csv");
  const Moments m(points);
  const DemingLine line = deming_line(m, 1);
  // Covariance of (intercept, slope) as published with the levels, brought into the centred form.
  const double v_slope = std::pow(0.0004297975230511, 2), v_intercept = std::pow(0.2328185265337, 2);
  const double cov = -7.743299679588e-05, mean = m.mean_x();
  const LineCovariance centred{v_intercept + 2 * mean * cov + mean * mean * v_slope, cov + mean * v_slope,
                               v_slope};
  const double t = t_quantile_of_tail(0.05, 34);
  for (const OzoneLevel& expected : kOzone) {
    CAPTURE(expected.level);
    const Bias bias = bias_at(line, centred, expected.level);
    CHECK(std::abs(bias.value - expected.bias) < 1e-8);
    CHECK(std::abs(bias.se - expected.se) < 1e-8);
    CHECK(std::abs(bias.value - t * bias.se - expected.low) < 1e-7);
    CHECK(std::abs(bias.value + t * bias.se - expected.high) < 1e-7);
    CHECK(position_of(bias, t, std::max(1.0, 0.005 * expected.level)) == expected.wide);
    CHECK(position_of(bias, t, std::max(0.3, 0.001 * expected.level)) == expected.tight);
  }
}

TEST_CASE("two one-sided tests of a paired clinical example") {
  // statsmodels' reference results, produced in R: mean difference, its 90 % interval, equivalent at +-0.6.
  const auto points = read_points("clinic_paired.csv");
  const Moments m(points);
  CHECK_CLOSE(m.mean_difference(), 0.1646666666666667, 1e-12);
  DemingLine line;
  line.mean_difference = m.mean_difference();
  const LineCovariance covariance{0.1357514067862445 * 0.1357514067862445, 0, 0};
  const Bias bias = bias_at(line, covariance, 3);
  const double t = t_quantile_of_tail(0.05, 14);
  CHECK(std::abs(bias.value - t * bias.se - -0.0744336620516462) < 1e-10);
  CHECK(std::abs(bias.value + t * bias.se - 0.4037669953849797) < 1e-10);
  CHECK(position_of(bias, t, 0.6) == Position::inside);
  CHECK_CLOSE(t_tail((0.6 - bias.value) / bias.se, 14), 0.003166881489265175, 1e-9);
}

TEST_CASE("positions of an interval, on the limits and with no width") {
  CHECK(position_of({0, 0.1}, 2, 0.2) == Position::inside);  // ends on the limits
  CHECK(position_of({0.3, 0.1}, 2, 0.2) == Position::across);
  CHECK(position_of({0.41, 0.1}, 2, 0.2) == Position::above);
  CHECK(position_of({-0.41, 0.1}, 2, 0.2) == Position::below);
  CHECK(position_of({0.2, 0}, 2, 0.2) == Position::inside);
  CHECK(position_of({0, 5}, 2, 0.2) == Position::across);  // wider than the limits
}

TEST_CASE("the joint identity test equals the test on intercept and slope") {
  std::mt19937_64 random(31);
  const auto points = draw({9, 15, 0.05, 0.99, 0.05, 0.05}, 50, random);
  const Moments m(points);
  const DemingLine line = deming_line(m, 1);
  const LineCovariance v = *jackknife_covariance(points, m, line);
  const double v00 = v.difference_at(-m.mean_x()), v01 = v.intercept_slope(m.mean_x()), v11 = v.slope;
  const double a = line.intercept(), b = line.slope - 1;
  const double f = (a * a * v11 - 2 * a * b * v01 + b * b * v00) / (v00 * v11 - v01 * v01) / 2;
  CHECK_CLOSE(identity_p(line, v, 50), f_tail(f, 2, 48), 1e-6);  // the plain form loses digits
}

TEST_CASE("the identity test of an exact line") {
  DemingLine line;
  CHECK(identity_p(line, {}, 10) == 1);
  line.slope = 1.1;
  CHECK(identity_p(line, {}, 10) == 0);
}

TEST_CASE("single results: share within and limits") {
  const SingleResult single = single_result(0.1, 0.04, 30, 0.3);
  CHECK_CLOSE(single.share_within, normal_cdf(1.0) - normal_cdf(-2.0), 1e-12);
  CHECK_CLOSE(single.high - 0.1, 0.2 * t_quantile_of_tail(0.025, 30), 1e-12);
  CHECK_CLOSE(0.1 - single.low, 0.2 * t_quantile_of_tail(0.025, 30), 1e-12);
  CHECK(single_result(0.1, 0, 30, 0.3).share_within == 1);
  CHECK(single_result(0.4, 0, 30, 0.3).share_within == 0);
}
