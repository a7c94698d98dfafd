// Published values: what a chart learns of its readings.
#include "core/chart/moving_range.hpp"

#include <fstream>

#include <doctest/doctest.h>

#include "support.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
ChartView view_of(const std::vector<double>& values) {
  const Settings settings = mill(1e9, 2000);
  Fed fed(settings);
  for (const double value : values) fed.read(value);
  return fed.chart.view();
}

std::vector<double> alternating(double first, double low, double high) {
  std::vector<double> values = {first};
  for (int i = 0; i < 500; ++i) values.insert(values.end(), {low, high});
  return values;
}
}  // namespace

// NIST/SEMATECH e-Handbook of Statistical Methods 6.3.2.2 (values from memory; data and results confirm
// each other). The handbook divides by 1.128, the chart by 2/sqrt(pi).
TEST_CASE("individuals and moving ranges of the e-Handbook's flow rates") {
  const ChartView view = view_of({49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6, 52.1});
  REQUIRE(view.baseline.center);
  CHECK(std::abs(*view.baseline.center - 50.81) < 0.005);
  CHECK(std::abs(*view.baseline.moving_range_mean - 1.8778) < 5e-5);
  CHECK(std::abs(*view.baseline.sigma - 1.664137226684) < 1e-9);
  CHECK(std::abs(*view.baseline.sigma * kD2 / 1.128 - 1.664696611505) < 1e-9);
  CHECK(std::abs(*view.baseline.sigma_degrees_of_freedom - 5.857608486128) < 1e-6);
  const double ranges[] = {2.0, 2.3, 1.4, 3.5, 3.4, 1.4, 0.2, 1.2, 1.5};
  CHECK_FALSE(view.points[0].moving_range);
  for (std::size_t i = 0; i < 9; ++i)
    CHECK(*view.points[i + 1].moving_range == doctest::Approx(ranges[i]).epsilon(1e-9));
}

// Variance: Cryer and Ryan, J. Qual. Technol. 22 (1990) 187 (formula from memory); values computed
// independently to 13 digits.
TEST_CASE("degrees of freedom behind a mean moving range") {
  struct Row {
    std::int64_t n;
    double variance, degrees;
  };
  const Row rows[] = {{3, 0.4447560173533, 1.586819044687},    {5, 0.2427219561069, 2.81212320122},
                      {10, 0.1128996218327, 5.857608486128},   {15, 0.07350095632242, 8.890531869878},
                      {20, 0.05448062468126, 11.91962220789},  {25, 0.04327920760534, 14.94710630423},
                      {30, 0.03589790921691, 17.973772232},    {50, 0.02133919780691, 30.07712318961},
                      {100, 0.01059571417629, 60.32965480889}, {200, 0.005279537285842, 120.8309422074}};
  for (const Row& row : rows) {
    CAPTURE(row.n);
    CHECK(std::abs(moving_range_variance(row.n) - row.variance) < 1e-10);
    CHECK(std::abs(moving_range_degrees_of_freedom(row.n) - row.degrees) < 1e-6);
  }
  CHECK_THROWS_AS((void)moving_range_degrees_of_freedom(1), std::domain_error);
}

TEST_CASE("degrees of freedom rise with every reading, also where their series takes over") {
  double last = 0;
  for (std::int64_t n = 2; n < 5000; ++n) {
    const double now = moving_range_degrees_of_freedom(n);
    CHECK(now > last);
    last = now;
  }
  CHECK(last == doctest::Approx(4999 / (2 * 0.826449)).epsilon(1e-3));
}

// NIST StRD, univariate: NumAcc1-4 (Simon and Lesage 1989), exact by construction; Lew certified (from
// memory).
TEST_CASE("mean, sd and lag-1 autocorrelation of the StRD sets") {
  const auto check = [](const std::vector<double>& values, double mean, double sd, double r,
                        double tolerance) {
    const ChartView view = view_of(values);
    CHECK(*view.baseline.center == doctest::Approx(mean).epsilon(1e-14));
    CHECK(std::abs(*view.baseline.sd - sd) < tolerance * sd);
    CHECK(std::abs(*view.serial_correlation - r) < tolerance);
  };
  check({10000001, 10000003, 10000002}, 10000002, 1, -0.5, 1e-9);
  check(alternating(1.2, 1.1, 1.3), 1.2, 0.1, -0.999, 1e-9);
  check(alternating(1000000.2, 1000000.1, 1000000.3), 1000000.2, 0.1, -0.999, 1e-7);
  check(alternating(10000000.2, 10000000.1, 10000000.3), 10000000.2, 0.1, -0.999, 1e-6);

  std::vector<double> lew;
  std::ifstream file(AGREED_TEST_DATA "/chart/lew_deflection.csv");
  for (std::string line; std::getline(file, line);)
    if (const auto comma = line.rfind(','); !line.empty() && line[comma + 1] != 'y')
      lew.push_back(std::stod(line.substr(comma + 1)));
  REQUIRE(lew.size() == 200);
  check(lew, -177.435, 277.332168044316, -0.307304800605679, 1e-12);
}
