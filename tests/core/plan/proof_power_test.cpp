// Powers in closed form against tests/data/plan/proof_power.csv, made independently in scipy.
#include "core/plan/proof_power.hpp"

#include <algorithm>
#include <cmath>
#include <fstream>
#include <numeric>
#include <sstream>
#include <stdexcept>
#include <string>
#include <vector>

#include <doctest/doctest.h>

#include "tests/core/plan/support.hpp"

using namespace agreed;
using namespace agreed::plan;
using namespace agreed::test;
using doctest::Approx;

namespace {
/// The numbers of the rows of that name.
std::vector<std::vector<double>> rows(const std::string& name) {
  std::ifstream file(std::string(AGREED_TEST_DATA) + "/plan/proof_power.csv");
  std::vector<std::vector<double>> found;
  for (std::string line; std::getline(file, line);) {
    std::istringstream cells(line);
    std::string cell;
    if (!std::getline(cells, cell, ',') || cell != name) continue;
    found.emplace_back();
    while (std::getline(cells, cell, ',')) found.back().push_back(std::stod(cell));
  }
  REQUIRE(found.size() > 4);
  return found;
}

/// Of the crossover of Diletti, Hauschke and Steinijans: both sequences together `n` subjects.
double crossover_power(double cv_percent, double ratio, int n) {
  const double sd = std::sqrt(std::log(1 + cv_percent * cv_percent / 1e4));
  return power_of_two_tests(std::log(1.25), std::log(ratio), sd * std::sqrt(2.0 / n), n - 2);
}

const std::vector<ProofAim> kAims{{10.5, 0.1}, {13.0, 0.1}};
}  // namespace

TEST_CASE("two one-sided tests: Owen's Q functions") {
  for (const auto& row : rows("one")) {
    CAPTURE(row[2]);
    CAPTURE(row[3]);
    CHECK(std::abs(power_of_two_tests(row[0], row[1], row[2], row[3]) - row[4]) < 1e-7);
    CHECK(std::abs(power_of_two_tests(row[0], -row[1], row[2], row[3]) - row[4]) < 1e-7);
  }
}

TEST_CASE("two one-sided tests: least numbers of subjects for 80 % (Diletti, Hauschke and Steinijans 1991)") {
  // Int. J. Clin. Pharmacol. Ther. Toxicol. 29 (1991) 1, ratios 1.00 and 0.95: from memory; confirmed by
  // power_reference.py.
  struct Row {
    double cv;
    int equal, five_percent_off;
  };
  for (const Row& row :
       {Row{5, 4, 4}, Row{7.5, 6, 6}, Row{10, 6, 8}, Row{12.5, 8, 10}, Row{15, 10, 12}, Row{17.5, 14, 16},
        Row{20, 16, 20}, Row{22.5, 20, 24}, Row{25, 24, 28}, Row{27.5, 28, 34}, Row{30, 32, 40}})
    for (const auto& [off, n] : {std::pair(1.0, row.equal), std::pair(0.95, row.five_percent_off)}) {
      const double ratio = off;
      CAPTURE(row.cv);
      CAPTURE(ratio);
      CHECK(crossover_power(row.cv, ratio, n) >= 0.8);
      if (n > 4) CHECK(crossover_power(row.cv, ratio, n - 2) < 0.8);
    }
  for (const auto& row : rows("crossover"))
    CHECK(std::abs(crossover_power(row[0], row[1], static_cast<int>(row[2])) - row[4]) < 1e-7);
}

TEST_CASE("two one-sided tests: limits of the law") {
  // At the border of what is allowable the chance is that of one test.
  CHECK(power_of_two_tests(1, 1, 0.1, 30) == Approx(0.05).epsilon(1e-6));
  CHECK(power_of_two_tests(1, 1, 0.1, 30, 0.01) == Approx(0.01).epsilon(1e-6));
  CHECK(power_of_two_tests(1, 0, 1e-6, 30) == Approx(1));
  CHECK(power_of_two_tests(0, 0, 1, 30) == 0);
  CHECK(power_of_two_tests(1, 5, 0.1, 30) < 1e-12);
  // Known errors: Phi((A - D)/se - z) - Phi(-(A + D)/se + z), z = 1.6448536.
  const double known = 0.5 * (std::erf((4 - 1.6448536269514722) / std::sqrt(2.0)) -
                              std::erf((-6 + 1.6448536269514722) / std::sqrt(2.0)));
  CHECK(power_of_two_tests(5, 1, 1, 1e7) == Approx(known).epsilon(1e-5));
  CHECK_THROWS_AS((void)power_of_two_tests(1, 0, 0, 10), std::invalid_argument);
  CHECK_THROWS_AS((void)power_of_two_tests(1, 0, 1, 0), std::invalid_argument);
}

TEST_CASE("all levels at once: the bivariate normal integrated over the residual sd") {
  for (const auto& row : rows("all")) {
    CAPTURE(row[0]);
    CAPTURE(row[3]);
    const ProofPower power =
        proof_power(conditions(row[0], row[1]), kAims, FitMethod::deming, row[2], static_cast<int>(row[3]));
    CHECK(std::abs(power.all - row[4]) < 1e-6);
  }
}

TEST_CASE("all levels at once lie between what each level alone allows") {
  RandomNormal draw(21);
  for (int plant = 0; plant < 60; ++plant) {
    std::vector<ProofAim> aims;
    for (int i = 0; i < 1 + plant % 4; ++i)
      aims.push_back({8 + 8 * draw.uniform(), 0.05 + 0.2 * draw.uniform()});
    const PairConditions c = conditions(0.02 + 0.2 * draw.uniform(), 0.02 + 0.2 * draw.uniform());
    const ProofPower power = proof_power(c, aims, FitMethod::deming, 0.05 * draw.uniform(),
                                         5 + static_cast<int>(100 * draw.uniform()));
    double missing = 0;
    for (const double level : power.levels) missing += 1 - level;
    CHECK(power.all <= *std::min_element(power.levels.begin(), power.levels.end()) + 1e-6);
    CHECK(power.all >= 1 - missing - 1e-6);
    // The same level twice asks nothing more.
    const std::vector<ProofAim> twice{aims.front(), aims.front()};
    CHECK(proof_power(c, twice, FitMethod::deming, 0, 30).all ==
          Approx(proof_power(c, std::vector{aims.front()}, FitMethod::deming, 0, 30).all).epsilon(1e-6));
  }
}

TEST_CASE("power grows with pairs, precision and what is allowable, and falls with bias") {
  const auto power = [](double sd, double allowable, double bias, int n) {
    const std::vector<ProofAim> aims{{10.5, allowable}, {13, allowable}};
    return proof_power(conditions(sd, sd), aims, FitMethod::deming, bias, n).all;
  };
  const double base = power(0.1, 0.1, 0, 40);
  CHECK(power(0.1, 0.1, 0, 50) > base);
  CHECK(power(0.09, 0.1, 0, 40) > base);
  CHECK(power(0.1, 0.11, 0, 40) > base);
  CHECK(power(0.1, 0.1, 0.01, 40) < base);
  CHECK(power(0.1, 0.1, -0.02, 40) == Approx(power(0.1, 0.1, 0.02, 40)).epsilon(1e-6));
  // Only proportions count.
  CHECK(power(0.1, 0.1, 0.02, 60) ==
        Approx(proof_power(conditions(0.1, 0.1), kAims, FitMethod::deming, 0.02, 60).all));
  PairConditions scaled = conditions(100, 100);
  scaled.samples = SampleValues::evenly(9000, 15'000);
  const std::vector<ProofAim> far{{10'500, 100}, {13'000, 100}};
  CHECK(proof_power(scaled, far, FitMethod::deming, 0, 40).all == Approx(base).epsilon(1e-9));
}

TEST_CASE("an estimated error ratio costs power, levels out of reach are told") {
  PairConditions estimated = conditions(0.3, 0.3);
  estimated.samples = SampleValues::evenly(11, 12);
  const std::vector<ProofAim> aims{{10.9, 0.3}, {12, 0.3}};
  const double known = proof_power(estimated, aims, FitMethod::deming, 0, 100).all;
  estimated.ratio.estimated = true;
  estimated.ratio.x.degrees_of_freedom = estimated.ratio.y.degrees_of_freedom = 20;
  const ProofPower power = proof_power(estimated, aims, FitMethod::deming, 0, 100);
  CHECK(power.all < known);
  CHECK(power.covered[0] == 0);
  CHECK(power.covered[1] == Approx(1 - std::pow(100.0 / 101, 100)));
}

TEST_CASE("weights where errors grow: as if each level were measured alone when all samples lie at it") {
  // All samples at 10 or 20, errors proportional to the level: the line's error at a level of the samples is
  // that of the mean of the half of the pairs that lie there.
  PairConditions growing = conditions(0.1, 0.1);
  growing.samples = SampleValues({10, 20});
  growing.ratio.x_model = growing.ratio.y_model = {ErrorGrowth::proportional, {}, 0, 1};
  for (const FitMethod fit : {FitMethod::deming, FitMethod::weighted_deming})
    for (const double level : {10.0, 20.0}) {
      const double sd = growing.sd_x_at(level) * std::sqrt(2.0);
      const std::vector<ProofAim> aims{{level, 0.08}};
      CHECK(proof_power(growing, aims, fit, 0, 50).all ==
            Approx(power_of_two_tests(0.08, 0, sd / std::sqrt(25.0), 48)).epsilon(1e-9));
    }
  growing.samples = SampleValues({-1, 20});
  CHECK(proof_power(growing, kAims, FitMethod::weighted_deming, 0, 50).all == 0);
}

TEST_CASE("aims come from the decision levels and what is allowable there") {
  Measurand measurand = harrow_mill().measurands[0];
  measurand.allowable = AllowableDifference{0.1, 1.0};
  const auto aims = proof_aims(measurand);
  REQUIRE(aims.size() == 2);
  CHECK(aims[0].level == 10.5);
  CHECK(aims[0].allowable == Approx(0.105));
  measurand.allowable.reset();
  CHECK(proof_aims(measurand).empty());
  CHECK(proof_power(conditions(), {}, FitMethod::deming, 0, 40).all == 0);
  CHECK_THROWS_AS((void)proof_power(conditions(), kAims, FitMethod::deming, 0, 2), std::invalid_argument);
}
