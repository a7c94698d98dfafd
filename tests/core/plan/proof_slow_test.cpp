// The planned power against whole comparisons, with their outliers, pair chart and verdict.
#include <cmath>

#include <doctest/doctest.h>

#include "core/pair/comparison.hpp"
#include "core/plan/proof_search.hpp"
#include "core/plan/proof_simulation.hpp"
#include "tests/core/plan/support.hpp"

using namespace agreed;
using namespace agreed::plan;
using namespace agreed::test;

namespace {
/// The share of comparisons whose verdict is agreement_shown at their `pairs`-th pair.
Simulated shown_by_comparisons(const Settings& settings, const PairConditions& c, double bias, int pairs) {
  int shown = 0;
  constexpr int runs = 1500;
  for (int run = 0; run < runs; ++run) {
    RandomNormal draw(61, static_cast<std::uint64_t>(run));
    Comparison comparison(settings, {0});
    std::vector<Finding> findings;
    Instant now{};
    for (int i = 0; i < pairs; ++i) {
      now += hours(2);
      comparison.add(draw_pair(c, {}, bias, 0, now, draw), c.ratio, findings);
    }
    shown += comparison.verdict() == Verdict::agreement_shown ? 1 : 0;
  }
  return share_of(shown, runs);
}
}  // namespace

TEST_CASE("so many pairs show agreement in a whole comparison as planned") {
  // The verdict stands until it was unsupported on three pairs in a row, so a comparison shows agreement a
  // little more often than the three newest pairs alone do.
  const Settings settings = shared(harrow_mill(), 6);
  for (const double bias : {0.0, 0.03}) {
    ProofSearch search(settings, {0}, conditions(), {0.9, bias}, {3000, 1, 3});
    finish(search);
    REQUIRE(search.needs().pairs);
    const Simulated whole = shown_by_comparisons(settings, conditions(), bias, *search.needs().pairs);
    MESSAGE(*search.needs().pairs << " pairs, planned " << search.needs().power.value
                                  << ", whole comparisons " << whole.value << " +- " << whole.standard_error);
    CHECK(whole.value > 0.9 - 3 * whole.standard_error);
    CHECK(whole.value < 0.97);
  }
}
