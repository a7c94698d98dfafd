// What a chart warns of: readings that are not as its run lengths take them to be.
#include <doctest/doctest.h>

#include "core/chart/heavy_tails.hpp"
#include "core/chart/run_length.hpp"
#include "core/chart/serial_correlation.hpp"
#include "tests/core/chart/scenario.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
double number_behind(const ChartView& view, const std::string& warning, const std::string& name) {
  for (const WarningNumbers& behind : view.warning_numbers)
    if (behind.warning == warning)
      for (const auto& [key, value] : behind.numbers)
        if (key == name) return value;
  return std::nan("");
}
}  // namespace

// Upper 1 % points of b2 = m4/m2^2 of normal samples, E. S. Pearson and H. O. Hartley, Biometrika Tables for
// Statisticians 1, table 34C (from memory).
TEST_CASE("99 % points of the kurtosis") {
  struct Row {
    std::int64_t n;
    double b2;
  };
  for (const Row& row :
       {Row{50, 4.88}, {75, 4.59}, {100, 4.39}, {150, 4.13}, {200, 3.98}, {300, 3.79}, {400, 3.67}}) {
    CAPTURE(row.n);
    CHECK(std::abs(kurtosis_point(row.n) + 3 - row.b2) < 0.02);
  }
  // The transformation itself, inverted independently.
  CHECK(kurtosis_point(50) + 3 == doctest::Approx(4.881913958391896).epsilon(1e-9));
  CHECK(kurtosis_point(400) + 3 == doctest::Approx(3.6699325028218284).epsilon(1e-9));
}

TEST_CASE("heavy tails: two values of the same size and a few far ones, by hand") {
  // 96 readings of +-1 and 4 of +-3: m2 = (96 + 36)/100, m4 = (96 + 324)/100.
  std::vector<double> values;
  for (int i = 0; i < 48; ++i) values.insert(values.end(), {9.0, 11.0});
  values.insert(values.end(), {7.0, 13.0, 7.0, 13.0});
  const Stretch stretch = stretch_of(values);
  const double excess = 4.2 / (1.32 * 1.32) - 3;
  CHECK_FALSE(heavy_tails(stretch, 100));  // -0.6
  CHECK(excess < 0);
  values.insert(values.end(), {2.0, 18.0});  // +-8: m2 = 260/102, m4 = 8612/102
  const auto tails = heavy_tails(stretch_of(values), 102);
  REQUIRE(tails);
  CHECK(tails->excess == doctest::Approx(8612.0 / 102 / (260.0 / 102 * 260.0 / 102) - 3));
  CHECK(tails->degrees == doctest::Approx(4 + 6 / tails->excess));
  CHECK_FALSE(heavy_tails(stretch_of({values.end() - 49, values.end()}), 49));
}

TEST_CASE(
    "run lengths of correlated readings and of heavy tails are those of the tables, between them between") {
  CHECK(run_length_if_correlated(0.2) == doctest::Approx(400));
  CHECK(run_length_if_correlated(0.6) == doctest::Approx(44));
  CHECK(run_length_if_correlated(0.9) == doctest::Approx(44));
  CHECK(run_length_if_correlated(-0.5) == doctest::Approx(1800));
  CHECK(run_length_if_correlated(0.15) == doctest::Approx(std::sqrt(830.0 * 400)));
  // Beyond the first and the last limit of the table its share of the present run length, which differs by 1
  // % from that of the table's own normal column.
  CHECK(run_length_with_tails(5, 3.86) == doctest::Approx(205).epsilon(0.02));
  CHECK(run_length_with_tails(8.4, 4.08) == doctest::Approx(586));
  CHECK(run_length_with_tails(30, 4.40) == doctest::Approx(6832).epsilon(0.02));
  CHECK(run_length_with_tails(4.1, 3.97) == doctest::Approx(std::sqrt(205.0 * 277)).epsilon(0.02));
  CHECK(run_length_with_tails(5, 3.3) < run_length_for(Score::level, 3.3) / 5);
  CHECK(run_length_with_tails(5, 4.8) < run_length_for(Score::level, 4.8) / 20);
}

TEST_CASE("t readings are warned of, normal ones hardly ever") {
  const auto warned = [](std::uint64_t seed, bool heavy) {
    const Settings settings = mill(1e9);
    Readings next(seed);
    int count = 0;
    for (int chart = 0; chart < 40; ++chart) {
      Fed fed(settings);
      for (int i = 0; i < 200; ++i) {
        const double z = next();
        double chi = 0;
        for (int d = 0; d < 4; ++d) {
          const double other = next();
          chi += other * other;
        }
        fed.read(heavy ? z / std::sqrt(chi / 4) : z);
      }
      for (const std::string& warning : fed.chart.view().warnings) count += warning == "heavy_tails";
    }
    return count;
  };
  CHECK(warned(601, true) > 30);
  CHECK(warned(602, false) <= 3);
}

TEST_CASE("numbers stand behind each warning") {
  const Settings settings = mill(1800);
  Fed fed(settings);
  Readings next(603);
  feed(fed, next, 10);
  const ChartView young = fed.chart.view();
  CHECK(number_behind(young, "baseline_short", "readings") == doctest::Approx(10));
  CHECK(number_behind(young, "baseline_short", "needed") == doctest::Approx(30));

  const Settings calm = mill(1e9);
  Fed linked(calm);
  double state = 0;
  for (int i = 0; i < 200; ++i) linked.read(state = 0.5 * state + next());
  const ChartView view = linked.chart.view();
  const double r = number_behind(view, "serial_correlation", "correlation");
  CHECK(r == doctest::Approx(*view.serial_correlation));
  CHECK(r == doctest::Approx(0.5).epsilon(0.4));
  CHECK(number_behind(view, "serial_correlation", "from") == doctest::Approx(1.65 / std::sqrt(200.0)));
  CHECK(number_behind(view, "serial_correlation", "run_length") ==
        doctest::Approx(run_length_if_correlated(r)));
  CHECK(*view.correlation_allowed_for > 0.2);
}
