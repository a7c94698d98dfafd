#include "core/pair/difference.hpp"

#include "tests/core/pair/support.hpp"

using namespace agreed;
using namespace agreed::test;

TEST_CASE("peak flow meters of Bland and Altman 1986: differences and limits of agreement") {
  const auto view = describe_differences(read_points("pefr_1986.csv"), std::nullopt);
  REQUIRE(view);
  // Printed (from memory): mean -2.1, sd 38.8, interval of the mean -22.0 to 17.8.
  CHECK(std::abs(view->mean - -2.1) < 0.05);
  CHECK(std::abs(view->sd - 38.8) < 0.05);
  CHECK(std::abs(view->mean_interval[0] - -22.0) < 0.06);
  CHECK(std::abs(view->mean_interval[1] - 17.8) < 0.06);
  // Computed outside this project, to more digits; the limits there use z = 1.96.
  CHECK_CLOSE(view->mean, -2.117647058824, 1e-11);
  CHECK_CLOSE(view->sd, 38.76512987361, 1e-11);
  const double z_difference = (1.96 - 1.9599639845400545) * view->sd;
  CHECK(std::abs(view->lower_limit - z_difference - -78.09730161109) < 1e-9);
  CHECK(std::abs(view->upper_limit + z_difference - 73.86200749345) < 1e-9);
  // 1999 formula with z = 1.96: se 16.39510798; t(0.975; 16) = 2.1199 (table).
  const double half = (view->upper_limit_interval[1] - view->upper_limit_interval[0]) / 2;
  CHECK(std::abs(half / 2.119905299 - 16.39510798471) < 4e-4);
  CHECK_FALSE(view->within_count);
}

TEST_CASE("exact intervals of a proportion") {
  // SciPy's test suite, values from R's binom.test; the third is an example of R's help page (from memory).
  const Interval a = proportion_interval(20, 100, 0.95);
  CHECK(std::abs(a[0] - 0.1266555521019559) < 1e-12);
  CHECK(std::abs(a[1] - 0.2918426890886281) < 1e-12);
  const Interval b = proportion_interval(0, 10, 0.95);
  CHECK(b[0] == 0);
  CHECK(std::abs(b[1] - 0.3084971) < 5.1e-8);
  const Interval c = proportion_interval(682, 925, 0.95);
  CHECK(std::abs(c[0] - 0.7076683) < 5.1e-8);
  CHECK(std::abs(c[1] - 0.7654066) < 5.1e-8);
  // NIST/SEMATECH e-Handbook 7.2.4.1 (from memory).
  const Interval d = proportion_interval(4, 20, 0.90);
  CHECK(std::abs(d[0] - 0.0714) < 5.1e-5);
  CHECK(std::abs(d[1] - 0.4010) < 5.1e-5);
  CHECK(proportion_interval(10, 10, 0.95)[1] == 1);
}

TEST_CASE("the share within the allowable difference is counted at each level") {
  const AllowableDifference allowable{0.2, 2.0};  // 2 % rules above 10
  const auto view =
      describe_differences(std::vector<Point>{{5, 5.19}, {5, 5.21}, {20, 20.39}, {20, 19.59}}, allowable);
  REQUIRE(view);
  CHECK(view->within_count == 2);
  CHECK(view->within_of == 4);
  CHECK(view->within_interval->at(0) == proportion_interval(2, 4, 0.95)[0]);
}

TEST_CASE("percent only: mean and limits in percent of the mean of the two, beside those in the unit") {
  // 100 (y - x) / ((x + y) / 2) of 9.5 and 10.5 is 10, of 19 and 21 is 10, of 21 and 19 is -10.
  const std::vector<Point> points = {{9.5, 10.5}, {19, 21}, {21, 19}};
  const auto view = describe_differences(points, AllowableDifference{std::nullopt, 12.0});
  REQUIRE(view);
  REQUIRE(view->percent);
  CHECK_CLOSE(view->percent->mean, 10.0 / 3, 1e-12);
  CHECK_CLOSE(view->percent->sd, std::sqrt(400.0 / 3), 1e-12);
  CHECK_CLOSE(view->percent->upper_limit, 10.0 / 3 + 1.9599639845400545 * view->percent->sd, 1e-12);
  CHECK_CLOSE(view->mean, 1.0 / 3, 1e-12);
  CHECK_FALSE(describe_differences(points, AllowableDifference{0.1, 12.0})->percent);
  CHECK_FALSE(describe_differences(points, std::nullopt)->percent);
  // No percentage of nothing.
  CHECK_FALSE(
      describe_differences(std::vector<Point>{{0, 0}, {1, 2}}, AllowableDifference{{}, 12.0})->percent);
}

TEST_CASE("too few or equal differences say so") {
  CHECK_FALSE(describe_differences(std::vector<Point>{{1, 2}}, std::nullopt));
  const auto view = describe_differences(std::vector<Point>{{1, 2}, {3, 4}, {5, 6}}, std::nullopt);
  REQUIRE(view);
  CHECK(view->mean == 1);
  CHECK(view->sd == 0);
  CHECK_FALSE(view->paired_t_p);
}

TEST_CASE("paired t test of the clinical example") {
  // t = 0.1646666667 / 0.1357514068 on 14 degrees of freedom (statsmodels' reference mean and standard
  // error).
  const auto view = describe_differences(read_points("clinic_paired.csv"), std::nullopt);
  REQUIRE(view);
  REQUIRE(view->paired_t_p);
  CHECK_CLOSE(view->sd / std::sqrt(15.0), 0.1357514067862445, 1e-12);
  CHECK(*view->paired_t_p > 0.24);
  CHECK(*view->paired_t_p < 0.25);
}
