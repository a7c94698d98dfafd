#include "core/plan/proof_simulation.hpp"

#include <cmath>
#include <stdexcept>
#include <vector>

#include <doctest/doctest.h>

#include "core/pair/bias.hpp"
#include "core/pair/window_fit.hpp"
#include "core/plan/proof_power.hpp"
#include "tests/core/plan/support.hpp"

using namespace agreed;
using namespace agreed::plan;
using namespace agreed::test;

namespace {
const Trials kTrials{2000, 1, 3};

double closed_form(const Settings& settings, const PairConditions& c, double bias, int pairs) {
  return proof_power(c, proof_aims(settings.measurands[0]), settings.comparisons[0].fit, bias, pairs).all;
}
}  // namespace

TEST_CASE("the closed form is that of the line's own covariance with samples as planned") {
  // Each sample once, and Fuller's covariance instead of the jackknife.
  const Settings settings = harrow_mill();
  constexpr int n = 25, runs = 4000;
  PairConditions c = conditions();
  std::vector<double> values;
  for (int i = 0; i < n; ++i) values.push_back(9 + 0.25 * i);
  c.samples = SampleValues(values);
  int shown = 0;
  RandomNormal draw(5);
  for (int run = 0; run < runs; ++run) {
    Window window(n, std::nullopt);
    for (int i = 0; i < n; ++i) {
      const double truth = values[static_cast<std::size_t>(i)];
      window.insert({truth + 0.1 * draw(), truth + 0.1 * draw()}, {Instant{}, i + 1, 1, 1});
    }
    const WindowFit fit = fit_window(window, c.ratio);
    REQUIRE(fit.exists());
    bool inside = true;
    for (const double level : settings.measurands[0].decision_levels)
      inside = inside && position_of(bias_at(fit.line, fit.analytic, level), 1.713871527747048,
                                     0.1) == Position::inside;  // t(23; 0.95)
    shown += inside ? 1 : 0;
  }
  const Simulated seen = share_of(shown, runs);
  const double closed = closed_form(settings, c, 0, n);
  MESSAGE(seen.value << " +- " << seen.standard_error << ", closed form " << closed);
  // The spread of 25 samples taken once each is by 25/24 wider than that of 25 drawn from them.
  CHECK(std::abs(seen.value - closed) < 3 * seen.standard_error + 0.01);
}

TEST_CASE("one look: the simulation is what the closed form says less what that leaves out") {
  Settings settings = harrow_mill();
  settings.comparisons[0].confirm = 1;
  // Samples as they come, and the jackknife's own scatter.
  struct Row {
    double sd, bias;
    int pairs;
    double lacking;
  };
  for (const Row& row : {Row{0.1, 0.0, 25, 0.09}, Row{0.1, 0.0, 40, 0.04}, Row{0.1, 0.03, 60, 0.04},
                         Row{0.15, -0.02, 100, 0.02}, Row{0.25, 0.02, 190, 0.02}}) {
    const PairConditions c = conditions(row.sd, row.sd);
    const Simulated simulated = simulated_proof_power(settings, {0}, c, row.bias, row.pairs, kTrials);
    const double closed = closed_form(settings, c, row.bias, row.pairs);
    MESSAGE(row.pairs << " pairs: " << simulated.value << " +- " << simulated.standard_error
                      << ", closed form " << closed);
    CHECK(simulated.value < closed + 3 * simulated.standard_error);
    CHECK(simulated.value > closed - row.lacking - 3 * simulated.standard_error);
  }
}

TEST_CASE("one look with errors that grow, and with unequal replicates: the weighted fits") {
  Settings settings = harrow_mill();
  settings.comparisons[0].confirm = 1;
  PairConditions growing = conditions();
  growing.ratio.x_model = growing.ratio.y_model = {ErrorGrowth::proportional, {}, 0, 0.01 / 144};
  for (const FitMethod fit : {FitMethod::deming, FitMethod::weighted_deming}) {
    settings.comparisons[0].fit = fit;
    const Simulated simulated = simulated_proof_power(settings, {0}, growing, 0, 45, {600, 1, 3});
    const double closed = closed_form(settings, growing, 0, 45);
    MESSAGE("simulated " << simulated.value << " +- " << simulated.standard_error << ", closed form "
                         << closed);
    CHECK(std::abs(simulated.value - closed) < 3 * simulated.standard_error + 0.03);
  }
}

TEST_CASE("replicates on both sides count as smaller errors") {
  Settings settings = harrow_mill();
  settings.comparisons[0].confirm = 1;
  PairConditions doubles = conditions(0.14, 0.14);
  doubles.x_replicates = doubles.y_replicates = 2;
  const double closed = closed_form(settings, doubles, 0, 40);
  CHECK(closed == doctest::Approx(closed_form(
                      settings, conditions(0.14 / std::sqrt(2.0), 0.14 / std::sqrt(2.0)), 0, 40)));
  const Simulated given = simulated_proof_power(settings, {0}, doubles, 0, 40, kTrials);
  CHECK(std::abs(given.value - closed) < 3 * given.standard_error + 0.04);
  settings.comparisons[0].error_ratio.source = ErrorSource::replicates;
  const Simulated own = simulated_proof_power(settings, {0}, doubles, 0, 40, kTrials);
  CHECK(std::abs(own.value - closed) < 3 * own.standard_error + 0.04);
}

TEST_CASE("confirmation costs a little, bias and samples that miss a level more") {
  Settings settings = harrow_mill();
  const auto power = [&](const PairConditions& c, double bias) {
    return simulated_proof_power(settings, {0}, c, bias, 45, kTrials).value;
  };
  const double three = power(conditions(), 0);
  settings.comparisons[0].confirm = 1;
  const double one = power(conditions(), 0);
  CHECK(three < one);
  CHECK(three > one - 0.06);
  CHECK(power(conditions(), 0.05) < one - 0.2);
  // At the border of the allowable difference no more than the error of one test.
  CHECK(power(conditions(), 0.1) < 0.05 + 3 * std::sqrt(0.05 * 0.95 / 2000));
  PairConditions narrow = conditions(0.02, 0.02);
  narrow.samples = SampleValues::evenly(11, 15);
  CHECK(power(narrow, 0) == 0);
}

TEST_CASE("below the least number of pairs nothing is shown") {
  Settings settings = harrow_mill();
  ComparisonSettings& comparison = settings.comparisons[0];
  CHECK(least_pairs_for_proof(comparison) == 22);
  comparison.confirm = 1;
  CHECK(least_pairs_for_proof(comparison) == 21);
  const PairConditions c = conditions(0.01, 0.01);
  CHECK(simulated_proof_power(settings, {0}, c, 0, 20, {50, 1, 3}) == Simulated{});
  CHECK(simulated_proof_power(settings, {0}, c, 0, 21, {50, 1, 3}).value > 0.9);
  settings.measurands[0].decision_levels.clear();
  CHECK(simulated_proof_power(settings, {0}, c, 0, 40, {50, 1, 3}) == Simulated{});
  CHECK_THROWS_AS((void)simulated_proof_power(settings, {0}, c, 0, 40, {0, 1, 3}), std::invalid_argument);
}
