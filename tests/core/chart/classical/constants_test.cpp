// Chart constants against the table, and what follows from them in closed form.
#include "core/chart/classical/constants.hpp"

#include <cmath>
#include <numbers>
#include <stdexcept>

#include "core/chart/moving_range.hpp"
#include "tests/core/chart/classical/table.hpp"

using namespace agreed;
using namespace agreed::classical;

// Computed independently to 10 digits; see tests/data/chart/README.md. Columns:
// n, d2, d3, c4, A, A2, A3, B3, B4, D3, D4, E2.
TEST_CASE("the constants of ISO 7870-2 are those of the table") {
  for (const auto& row : test::table("chart_constants.csv")) {
    const int n = static_cast<int>(row[0]);
    CAPTURE(n);
    const auto [d2, d3] = range_constants(n);
    const double c = c4(n), root = std::sqrt(static_cast<double>(n));
    CHECK(std::abs(d2 - row[1]) < 1e-9);
    CHECK(std::abs(d3 - row[2]) < 1e-9);
    CHECK(std::abs(c - row[3]) < 1e-9);
    CHECK(std::abs(3 / (d2 * root) - row[5]) < 1e-8);
    CHECK(std::abs(3 / (c * root) - row[6]) < 1e-8);
    CHECK(std::abs(1 + 3 * std::sqrt(1 - c * c) / c - row[8]) < 1e-8);
    CHECK(std::abs(1 + 3 * d3 / d2 - row[10]) < 1e-8);
  }
}

TEST_CASE("constants that are known in closed form") {
  const auto two = range_constants(2), three = range_constants(3);
  CHECK(std::abs(two.d2 - kD2) < 1e-12);
  CHECK(std::abs(two.d3 - std::sqrt(2 - 4 / std::numbers::pi)) < 1e-12);
  CHECK(std::abs(three.d2 - 3 / std::sqrt(std::numbers::pi)) < 1e-12);
  CHECK(std::abs(1 + 3 * two.d3 / two.d2 - kMovingRangeLimit) < 1e-12);
  CHECK(std::abs(c4(2) - std::sqrt(2 / std::numbers::pi)) < 1e-14);
}

TEST_CASE("above the table they go on, and below two readings there are none") {
  CHECK(range_constants(26).d2 > range_constants(25).d2);
  CHECK(range_constants(26).d2 - range_constants(25).d2 < range_constants(25).d2 - range_constants(24).d2);
  CHECK(range_constants(26).d3 < range_constants(25).d3);
  CHECK(std::abs(c4(400) - (4.0 * 400 - 4) / (4.0 * 400 - 3)) < 1e-6);  // Duncan's approximation
  CHECK_THROWS_AS((void)range_constants(1), std::domain_error);
  CHECK_THROWS_AS((void)c4(1), std::domain_error);
}
