#include "core/pair/proof_plan.hpp"

#include "tests/core/pair/support.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
ProofPlan plan(std::vector<LevelEvidence> levels, int pairs) {
  return plan_proof(levels, pairs, 0.999);
}
}  // namespace

TEST_CASE("pairs and scatter that decide it, against a search with scipy") {
  struct Row {
    double bias, allowable, se;
    int pairs, needed;
    double factor;
  };
  // scipy.stats.t and norm, every number of pairs tried one by one; the factor by scipy.optimize.brentq.
  for (const Row& row :
       {Row{0, 0.1, 0.05, 20, 56, 0.5919055903856776}, Row{0.04, 0.1, 0.03, 40, 87, 0.6739665136531485},
        Row{-0.04, 0.1, 0.03, 40, 87, 0.6739665136531485}, Row{0.09, 0.1, 0.01, 100, 858, 0.3398929520466058},
        Row{0.15, 0.1, 0.02, 30, 105, 0.5044942399012116}}) {
    CAPTURE(row.bias);
    const ProofPlan found = plan({{12, row.bias, row.se, row.allowable}}, row.pairs);
    CHECK(found.reason.empty());
    CHECK(found.more_pairs == row.needed - row.pairs);
    CHECK_CLOSE(found.scatter_factor.value_or(0), row.factor, 1e-9);
    CHECK(found.aim ==
          (std::abs(row.bias) > row.allowable ? Verdict::disagreement_shown : Verdict::agreement_shown));
  }
}

TEST_CASE("a bias as large as what is allowable is decided by no number of pairs") {
  for (const double bias : {0.1, -0.1, 0.09999}) {
    const ProofPlan found = plan({{12, bias, 0.02, 0.1}}, 50);
    CHECK(found.reason == no_plan::bias_as_large_as_allowable);
    CHECK_FALSE(found.more_pairs);
    CHECK_FALSE(found.scatter_factor);
    CHECK(found.bias == bias);
  }
}

TEST_CASE("agreement hangs on its slowest level, disagreement on its fastest") {
  CHECK(plan({{10, 0.0, 0.03, 0.1}, {13, 0.06, 0.03, 0.1}}, 40).level == 13);
  CHECK(plan({{10, 0.0, 0.03, 0.1}, {13, 0.1, 0.03, 0.1}}, 40).level == 13);
  CHECK(plan({{10, 0.12, 0.03, 0.1}, {13, 0.2, 0.03, 0.1}}, 40).level == 13);
  CHECK(plan({{10, 0.2, 0.03, 0.1}, {13, 0.0, 0.3, 0.1}}, 40).level == 10);
}

TEST_CASE("a level that no sample reaches is named; a bias beyond the limit at another one is told first") {
  const LevelEvidence near{10, 0.02, 0.03, 0.1}, far{16, 0.5, 0.3, 0.1, false}, beyond{10, 0.2, 0.03, 0.1};
  CHECK(plan({near, far}, 40).reason == no_plan::not_covered);
  CHECK(plan({near, far}, 40).level == 16);
  CHECK_FALSE(plan({near, far}, 40).more_pairs);
  CHECK(plan({beyond, far}, 40).reason.empty());
  CHECK(plan({beyond, far}, 40).aim == Verdict::disagreement_shown);
}

TEST_CASE("less scatter never asks for more pairs, and enough pairs ask for none") {
  int before = 0;
  for (double se = 0.005; se < 0.1; se *= 1.3) {
    const int more = *plan({{12, 0.03, se, 0.1}}, 40).more_pairs;
    CHECK(more >= before);
    before = more;
  }
  CHECK(before > 100);
  CHECK(plan({{12, 0.03, 0.005, 0.1}}, 40).more_pairs == 0);
  CHECK(plan({{12, 0.03, 0.0, 0.1}}, 40).more_pairs == 0);
}
