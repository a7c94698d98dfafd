// Every published value that the project reproduces, with its source, as printed and as worked out here by
// the code that the service runs.
//
//   published_values                 prints the table that is tests/published/README.md
//   published_values --check FILE    holds it against the file, and every value against the printed digits
//
// "memory": the printed digits were recalled and not read; each of them was confirmed by a computation
// outside this project.
#include <cmath>
#include <cstdio>
#include <fstream>
#include <iostream>
#include <sstream>
#include <string>
#include <vector>

#include "core/base/distributions.hpp"
#include "core/base/number_text.hpp"
#include "core/chart/classical/constants.hpp"
#include "core/chart/classical/cusum.hpp"
#include "core/chart/classical/run_length.hpp"
#include "core/chart/moving_range.hpp"
#include "core/chart/serial_correlation.hpp"
#include "core/chart/stretch.hpp"
#include "core/pair/bias.hpp"
#include "core/pair/deming.hpp"
#include "core/pair/difference.hpp"
#include "core/pair/weighted_line.hpp"

using namespace agreed;

namespace {
struct Value {
  std::string what, source, printed;
  double ours = 0;
  double tolerance = 0;  ///< half a unit of the last printed digit, or more where the source rounded before
};

/// Half a unit of the last digit of a printed decimal.
double half_unit(const std::string& printed) {
  const auto point = printed.find('.');
  const int decimals = point == std::string::npos ? 0 : static_cast<int>(printed.size() - point - 1);
  return 0.5 * std::pow(10.0, -decimals);
}

/// The values of one source.
class Source {
 public:
  Source(std::vector<Value>& values, std::string name) : values_(values), name_(std::move(name)) {}
  void add(const std::string& what, const std::string& printed, double ours, double tolerance = 0) {
    values_.push_back({what, name_, printed, ours, tolerance > 0 ? tolerance : half_unit(printed) * 1.0001});
  }

 private:
  std::vector<Value>& values_;
  std::string name_;
};

std::vector<Point> read_points(const std::string& name) {
  std::ifstream file(std::string(AGREED_TEST_DATA) + "/pair/" + name);
  if (!file) throw std::runtime_error("missing test data: " + name);
  std::vector<Point> points;
  bool names_seen = false;
  for (std::string line; std::getline(file, line);) {
    if (line.empty() || line[0] == '#') continue;
    if (std::exchange(names_seen, true))
      points.push_back({std::stod(line), std::stod(line.substr(line.find(',') + 1))});
  }
  return points;
}

void agreement(std::vector<Value>& all) {
  Source source(all,
                "J. M. Bland, D. G. Altman, Lancet i (1986) 307: peak flow meters, first readings (memory)");
  // x is the mini meter, y the large one; the paper's limits are mean +- 2 sd, ours +- 1.96 sd.
  const auto view = describe_differences(read_points("pefr_1986.csv"), std::nullopt).value();
  source.add("mean difference, l/min", "-2.1", view.mean);
  source.add("sd of the differences", "38.8", view.sd);
  source.add("mean - 2 sd (from the rounded figures)", "-79.7", view.mean - 2 * view.sd, 0.06);
  source.add("mean + 2 sd (from the rounded figures)", "75.5", view.mean + 2 * view.sd, 0.11);
  source.add("95 % interval of the mean, lower", "-22.0", view.mean_interval[0], 0.06);
  source.add("95 % interval of the mean, upper", "17.8", view.mean_interval[1], 0.06);

  Source tost(all, "statsmodels, test_tost.py (R): 15 patients; D. J. Schuirmann (1987)");
  const auto clinic = describe_differences(read_points("clinic_paired.csv"), std::nullopt).value();
  const double se = clinic.sd / std::sqrt(15.0), t90 = t_quantile_of_tail(0.05, 14);
  tost.add("mean difference", "0.1646666666666667", clinic.mean);
  tost.add("its standard error", "0.1357514067862445", se);
  tost.add("90 % interval, lower", "-0.0744336620516462", clinic.mean - t90 * se, 1e-10);
  tost.add("90 % interval, upper", "0.4037669953849797", clinic.mean + t90 * se, 1e-10);
  tost.add("p of the two one-sided tests, margin 0.6", "0.003166881489265175",
           t_tail((0.6 - clinic.mean) / se, 14), 1e-9);

  Source shares(all, "SciPy, test_morestats.py (R binom.test): C. J. Clopper, E. S. Pearson (1934)");
  shares.add("20 of 100, 95 %, lower", "0.1266555521019559", proportion_interval(20, 100, 0.95)[0], 1e-12);
  shares.add("20 of 100, 95 %, upper", "0.2918426890886281", proportion_interval(20, 100, 0.95)[1], 1e-12);
  shares.add("0 of 10, 95 %, upper", "0.3084971", proportion_interval(0, 10, 0.95)[1]);
  Source mendel(all, "R, help page of binom.test (memory): Mendel's peas");
  mendel.add("682 of 925, 95 %, lower", "0.7076683", proportion_interval(682, 925, 0.95)[0]);
  mendel.add("682 of 925, 95 %, upper", "0.7654066", proportion_interval(682, 925, 0.95)[1]);
  Source handbook(all, "NIST/SEMATECH e-Handbook 7.2.4.1 (memory)");
  handbook.add("4 of 20, 90 %, lower", "0.0714", proportion_interval(4, 20, 0.90)[0]);
  handbook.add("4 of 20, 90 %, upper", "0.401", proportion_interval(4, 20, 0.90)[1]);
}

std::vector<Point> pearson() {
  return read_points("pearson_1901.csv");
}

double se_intercept(const WeightedLine& line) {
  return std::sqrt(line.covariance.difference_at(-line.line.mean_x));
}

void lines(std::vector<Value>& all) {
  const double wx[] = {1000, 1000, 500, 800, 200, 80, 60, 20, 1.8, 1};
  const double wy[] = {1, 1.8, 4, 8, 20, 20, 70, 70, 100, 500};
  std::vector<Point> variances;
  for (int i = 0; i < 10; ++i) variances.push_back({1 / wx[i], 1 / wy[i]});
  const WeightedLine york = york_line(pearson(), variances);
  Source neri(all, "Pearson's points, York's weights: Neri, Saitta, Chiofalo, J. Phys. E 22 (1989) 215");
  neri.add("York's line, intercept", "5.47991022", york.line.intercept());
  neri.add("York's line, slope", "-0.480533407", york.line.slope);
  neri.add("chi-squared / (n - 2)", "1.4833", york.scale());

  const double sx[] = {0.03, 0.03, 0.04, 0.035, 0.07, 0.11, 0.13, 0.22, 0.74, 1.0};
  const double sy[] = {1.0, 0.74, 0.5, 0.35, 0.22, 0.22, 0.12, 0.12, 0.1, 0.04};
  std::vector<Point> squares;
  for (int i = 0; i < 10; ++i) squares.push_back({sx[i] * sx[i], sy[i] * sy[i]});
  const WeightedLine odr = york_line(pearson(), squares);
  Source scipy(all, "SciPy, test_odr.py, test_pearson (asserted to 5e-6)");
  scipy.add("intercept", "5.476740029923167", odr.line.intercept(), 5e-6);
  scipy.add("slope", "-0.4796082367610305", odr.line.slope, 5e-6);
  scipy.add("sd of the intercept, scaled", "0.3590121690702467", se_intercept(odr) * std::sqrt(odr.scale()),
            5e-6);
  scipy.add("sd of the slope, scaled", "0.0706291186037444", std::sqrt(odr.covariance.slope * odr.scale()),
            5e-6);

  const std::vector<Point> points{{1.2, 3.4}, {1.9, 4.4}, {2.9, 7.2}, {4.0, 8.5}, {4.7, 10.8}, {5.9, 13.5}};
  const WeightedLine iso = york_line(
      points,
      std::vector<Point>{{0.04, 0.04}, {0.04, 0.04}, {0.04, 0.04}, {0.04, 0.16}, {0.04, 0.16}, {0.04, 0.16}});
  Source ts(all, "ISO/TS 28037:2010, 7.4, as in the tests of the GTC library");
  ts.add("intercept", "0.5788", iso.line.intercept());
  ts.add("slope", "2.1597", iso.line.slope);
  ts.add("u(intercept)", "0.4764", se_intercept(iso));
  ts.add("u(slope)", "0.1355", std::sqrt(iso.covariance.slope));
  ts.add("covariance", "-0.0577", iso.covariance.intercept_slope(iso.line.mean_x));
  ts.add("chi-squared", "2.743", iso.chi_square);

  const std::vector<Point> exact_x{{1, 3.3}, {2, 5.6}, {3, 7.1}, {4, 9.3}, {5, 10.7}, {6, 12.1}};
  const WeightedLine ols = york_line(exact_x, std::vector<Point>(6, {1e-18, 0.25}));
  Source example(all, "ISO/TS 28037:2010, 6.3, example 1: no error in x");
  example.add("intercept", "1.867", ols.line.intercept());
  example.add("slope", "1.757", ols.line.slope);
  example.add("u(intercept)", "0.465", se_intercept(ols));
  example.add("u(slope)", "0.120", std::sqrt(ols.covariance.slope));
  example.add("covariance", "-0.050", ols.covariance.intercept_slope(ols.line.mean_x));
  example.add("chi-squared", "1.665", ols.chi_square);

  const Moments ozone(read_points("norris_ozone.csv"));
  const DemingLine norris = deming_line(ozone, 1e16);
  Source nist(all, "NIST StRD, Norris (certified): least squares as the Deming line of an exact x");
  nist.add("intercept", "-0.262323073774029", norris.intercept(), 1e-9);
  nist.add("slope", "1.00211681802045", norris.slope, 1e-11);
}

void distributions(std::vector<Value>& all) {
  Source t(all, "NIST/SEMATECH e-Handbook 1.3.6.7.2 (memory)");
  const std::pair<int, const char*> rows[] = {{1, "12.706"}, {2, "4.303"},  {3, "3.182"}, {5, "2.571"},
                                              {10, "2.228"}, {20, "2.086"}, {30, "2.042"}};
  for (const auto& [df, printed] : rows)
    t.add("t(0.975; " + std::to_string(df) + ")", printed, t_quantile_of_tail(0.025, df));
  t.add("t(0.95; 10)", "1.812", t_quantile_of_tail(0.05, 10));
  t.add("t(0.995; 10)", "3.169", t_quantile_of_tail(0.005, 10));
  Source f(all, "NIST/SEMATECH e-Handbook 1.3.6.7.3 (memory)");
  f.add("F(0.95; 2, 2)", "19.000", f_quantile(0.95, 2, 2));
  f.add("F(0.95; 5, 10)", "3.326", f_quantile(0.95, 5, 10));
  f.add("F(0.95; 4, 20)", "2.866", f_quantile(0.95, 4, 20));
  f.add("F(0.95; 1, 30)", "4.171", f_quantile(0.95, 1, 30));
  Source listing(all, "NIST/SEMATECH e-Handbook, listings of pages mpc62 and eda35d");
  listing.add("F(0.95; 5, 125)", "2.286771", f_quantile(0.95, 5, 125));
  listing.add("z(0.975)", "1.959964", normal_quantile_of_tail(0.025));
}

void constants(std::vector<Value>& all) {
  Source source(all, "ISO 7870-2, ASTM Manual 7 (memory)");
  const struct {
    int n;
    const char *d2, *d3, *c4;
  } rows[] = {{2, "1.128", "0.853", "0.7979"}, {3, "1.693", "0.888", "0.8862"},
              {4, "2.059", "0.880", "0.9213"}, {5, "2.326", "0.864", "0.9400"},
              {6, "2.534", "0.848", "0.9515"}, {10, "3.078", "0.797", "0.9727"}};
  for (const auto& row : rows) {
    const std::string n = ", n = " + std::to_string(row.n);
    const auto range = classical::range_constants(row.n);
    source.add("d2" + n, row.d2, range.d2);
    source.add("d3" + n, row.d3, range.d3);
    source.add("c4" + n, row.c4, classical::c4(row.n));
  }
  source.add("D4, n = 2 (from rounded d2, d3)", "3.267", classical::kMovingRangeLimit, 0.0011);

  const double flow[] = {49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6, 52.1};
  double mean = 0, range = 0;
  for (int i = 0; i < 10; ++i) {
    mean += flow[i] / 10;
    if (i > 0) range += std::abs(flow[i] - flow[i - 1]) / 9;
  }
  Source flowrate(all, "NIST/SEMATECH e-Handbook 6.3.2.2, flow rate (memory); it takes d2 = 1.128");
  flowrate.add("mean moving range", "1.8778", range);
  flowrate.add("upper limit", "55.8041", mean + 3 * range / kD2, 0.0018);
  flowrate.add("lower limit", "45.8159", mean - 3 * range / kD2, 0.0018);

  const double x[] = {324.925, 324.675, 324.725, 324.35, 325.35,  325.225, 324.125, 324.525, 325.225, 324.6,
                      324.625, 325.15,  328.325, 327.25, 327.825, 328.5,   326.675, 327.775, 326.875, 328.35};
  classical::Cusum cusum;
  Source sums(all, "NIST/SEMATECH e-Handbook 6.3.2.3, cumulative sums (memory)");
  for (int i = 0; i < 20; ++i) {
    cusum.take(x[i] - 325, 0.3175);
    if (i == 7) sums.add("lower sum, reading 8", "0.72", cusum.lower, 0.0051);
    if (i == 13) sums.add("upper sum, reading 14", "4.94", cusum.upper, 0.0051);
    if (i == 19) sums.add("upper sum, reading 20", "19.04", cusum.upper, 0.0051);
  }
}

void run_lengths(std::vector<Value>& all) {
  RunRules two, three, four, both;
  two.two_of_three_beyond = 2;
  three.four_of_five_beyond = 1;
  four.same_side = 8;
  both.two_of_three_beyond = 2;
  both.four_of_five_beyond = 1;
  both.same_side = 8;
  Source rules(all, "C. W. Champ, W. H. Woodall, Technometrics 29 (1987) 393, table 1 (memory)");
  const struct {
    const char* what;
    RunRules rules;
    const char *at_0, *at_04, *at_1;
  } rows[] = {{"3 sd limits", {}, "370.40", "200.08", "43.89"},
              {"with 2 of 3 beyond 2 sd", two, "225.44", "104.46", "20.01"},
              {"with 4 of 5 beyond 1 sd", three, "166.05", "63.88", "12.66"},
              {"with 8 on one side", four, "152.73", "59.76", "14.58"},
              {"with all three", both, "91.75", "36.61", "9.22"}};
  for (const auto& row : rows) {
    const std::string what = std::string("run length, ") + row.what + ", shift ";
    rules.add(what + "0", row.at_0, classical::rules_run_length(row.rules).value(), 0.0051);
    rules.add(what + "0.4 sd", row.at_04, classical::rules_run_length(row.rules, true, 0.4).value(), 0.0051);
    rules.add(what + "1 sd", row.at_1, classical::rules_run_length(row.rules, true, 1).value(), 0.0051);
  }
  Source ewma(
      all, "J. M. Lucas, M. S. Saccucci, Technometrics 32 (1990) 1 (memory; widths printed with 3 decimals)");
  ewma.add("EWMA 0.40, width 3.054, shift 0", "500", classical::ewma_run_length_asymptotic(0.4, 3.054), 0.56);
  ewma.add("EWMA 0.20, width 2.962, shift 0.5 sd", "41.8",
           classical::ewma_run_length_asymptotic(0.2, 2.962, 0.5), 0.15);
  ewma.add("EWMA 0.10, width 2.814, shift 1 sd", "10.3", classical::ewma_run_length_asymptotic(0.1, 2.814, 1),
           0.15);
  Source cusum(all, "J. M. Lucas, R. B. Crosier, Technometrics 24 (1982) 199 (memory)");
  cusum.add("CUSUM 0.5, limit 4, shift 0", "168", classical::cusum_run_length(0.5, 4), 0.51);
  cusum.add("CUSUM 0.5, limit 4, shift 1 sd", "8.38", classical::cusum_run_length(0.5, 4, 1));
  cusum.add("CUSUM 0.5, limit 5, shift 0", "465", classical::cusum_run_length(0.5, 5), 0.51);
  cusum.add("CUSUM 0.5, limit 5, shift 1 sd", "10.4", classical::cusum_run_length(0.5, 5, 1), 0.051);
}

std::vector<Value> all_values() {
  std::vector<Value> all;
  agreement(all);
  lines(all);
  distributions(all);
  constants(all);
  run_lengths(all);
  return all;
}

std::string table_of(const std::vector<Value>& values) {
  std::string out =
      "# Published values\n\n"
      "Printed by `published_values`, which works out each of them with the code that the service runs; a "
      "test\n"
      "holds this page, and every value against its printed digits. \"Memory\" says that the printed digits "
      "were\n"
      "recalled and not read; each was confirmed by a computation outside this project. Tables and examples "
      "are\n"
      "quoted as facts, numbers only; the data of NIST are works of the US government.\n";
  std::string source;
  for (const Value& value : values) {
    if (value.source != source) {
      source = value.source;
      out += "\n## " + source + "\n\n| quantity | printed | here |\n|---|---|---|\n";
    }
    out += "| " + value.what + " | " + value.printed + " | " + significant(value.ours, 10) + " |\n";
  }
  return out;
}

int check(const std::vector<Value>& values, const char* path) {
  int wrong = 0;
  for (const Value& value : values) {
    if (std::abs(value.ours - std::stod(value.printed)) <= value.tolerance) continue;
    std::printf("%s: %s printed, %.12g here (%s)\n", value.what.c_str(), value.printed.c_str(), value.ours,
                value.source.c_str());
    ++wrong;
  }
  std::ifstream file(path);
  std::stringstream text;
  text << file.rdbuf();
  if (text.str() != table_of(values)) {
    std::printf("%s is not what published_values prints; print it anew\n", path);
    ++wrong;
  }
  std::printf("%zu values, %d wrong\n", values.size(), wrong);
  return wrong > 0 ? 1 : 0;
}
}  // namespace

int main(int argc, char** argv) {
  const auto values = all_values();
  if (argc == 3 && std::string(argv[1]) == "--check") return check(values, argv[2]);
  std::cout << table_of(values);
  return 0;
}
