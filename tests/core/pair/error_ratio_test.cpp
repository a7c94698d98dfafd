#include "core/pair/error_ratio.hpp"

#include "tests/core/pair/support.hpp"

using namespace agreed;
using namespace agreed::test;

TEST_CASE("standards pool by their degrees of freedom; unknown ones are left out") {
  const Repeatability standards[] = {{{}, 4, 10, 11}, {{}, 1, 20, 13}, {{}, 99, 0, 12}};
  const ErrorVariance pool = pooled(standards);
  CHECK(pool.degrees_of_freedom == 30);
  CHECK_CLOSE(pool.variance, 2, 1e-15);
  CHECK(pooled({}).degrees_of_freedom == 0);
}

TEST_CASE("lambda and its interval") {
  const ErrorRatio ratio = ratio_of({0.0004, 10}, {0.0001, 20});
  REQUIRE(ratio.known);
  CHECK(ratio.estimated);
  CHECK_CLOSE(ratio.lambda, 4, 1e-14);
  // F(0.975; 10, 20) = 2.774 and F(0.975; 20, 10) = 3.419 in printed tables (from memory).
  CHECK(std::abs(4 / ratio.low - 2.774) < 5e-4);
  CHECK(std::abs(ratio.high / 4 - 3.419) < 5e-4);
}

TEST_CASE("a ratio that nothing is known of says why") {
  CHECK(ratio_of({0.1, 0}, {0.1, 10}).reason == "repeatability_not_known");
  CHECK(ratio_of({0, 10}, {0.1, 10}).reason == "repeatability_is_zero");
  CHECK_FALSE(ratio_of({0.1, 10}, {0, 10}).known);
}

TEST_CASE("a given ratio: sds without, a bare lambda with a factor 2 either way") {
  const ErrorRatio sds = given_ratio({ErrorSource::given_sds, 0.02, 0.01, 0});
  CHECK(sds.known);
  CHECK(sds.variances_known);
  CHECK_FALSE(sds.estimated);
  CHECK_CLOSE(sds.lambda, 4, 1e-14);
  CHECK_CLOSE(sds.low, 4, 1e-14);
  const ErrorRatio bare = given_ratio({ErrorSource::given_lambda, 0, 0, 3});
  CHECK(bare.known);
  CHECK_FALSE(bare.variances_known);
  CHECK(bare.low == 1.5);
  CHECK(bare.high == 6);
  CHECK_FALSE(given_ratio({ErrorSource::check_standards, 0, 0, 0}).known);
}
