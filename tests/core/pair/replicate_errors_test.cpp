#include "core/pair/replicate_errors.hpp"

#include "tests/core/pair/support.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
struct Side {
  int replicates = 1;
  double squares = 0;
};

Pair pair_at(double level, Side x, Side y) {
  return {"S", {}, level, level, x.replicates, y.replicates, x.squares, y.squares};
}

ErrorRatio ratio(ErrorGrowth growth, const std::vector<Pair>& pairs) {
  ReplicatePool pool(growth);
  for (const Pair& pair : pairs) pool.add(pair);
  return pool.ratio();
}
}  // namespace

TEST_CASE("lambda from replicates: pooled within samples, by degrees of freedom") {
  // x: 0.02 on 1, 0.06 on 2 degrees of freedom; y: 0.01 and 0.03 on 1 each.
  const std::vector<Pair> pairs{pair_at(10, {2, 0.02}, {2, 0.01}), pair_at(20, {3, 0.06}, {}),
                                pair_at(30, {}, {2, 0.03})};
  const ErrorRatio constant = ratio(ErrorGrowth::constant, pairs);
  REQUIRE(constant.known);
  CHECK_CLOSE(constant.x.variance, 0.08 / 3, 1e-14);
  CHECK_CLOSE(constant.y.variance, 0.04 / 2, 1e-14);
  CHECK_CLOSE(constant.x.degrees_of_freedom, 3, 1e-12);
  CHECK_CLOSE(constant.y.degrees_of_freedom, 2, 1e-12);
  CHECK_CLOSE(constant.lambda, 4.0 / 3, 1e-13);
  CHECK(constant.estimated);

  const ErrorRatio growing = ratio(ErrorGrowth::proportional, pairs);
  REQUIRE(growing.known);
  CHECK_CLOSE(growing.x_model.relative, (0.02 / 100 + 0.06 / 400) / 3, 1e-13);
  CHECK_CLOSE(growing.y_model.relative, (0.01 / 100 + 0.03 / 900) / 2, 1e-13);
  CHECK_CLOSE(growing.x.degrees_of_freedom, 3, 1e-12);
}

TEST_CASE("why replicates tell no lambda") {
  CHECK(ratio(ErrorGrowth::constant, {}).reason == "no_replicates_of_x");
  CHECK(ratio(ErrorGrowth::constant, {pair_at(1, {}, {2, 1})}).reason == "no_replicates_of_x");
  CHECK(ratio(ErrorGrowth::constant, {pair_at(1, {2, 1}, {})}).reason == "no_replicates_of_y");
  CHECK(ratio(ErrorGrowth::constant, {pair_at(1, {2, 1}, {2, 0})}).reason == "repeatability_is_zero");
}
