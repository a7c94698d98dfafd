// The tables of run lengths repeated with other random numbers, up to the limit 3.86. The table's own error
// is at most a third of this simulation's.
#include <doctest/doctest.h>

#include "core/chart/run_length.hpp"
#include "tests/core/run_lengths/simulation.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
void check_table(Score score, const std::vector<Tally>& tallies) {
  for (const Tally& tally : tallies) {
    const double table = run_length_for(score, tally.limit);
    CAPTURE(tally.limit);
    MESSAGE("limit " << tally.limit << ": " << tally.mean() << " +- " << tally.error() << ", table "
                     << table);
    CHECK(std::abs(tally.mean() - table) < 3 * 1.06 * tally.error());
  }
}
}  // namespace

TEST_CASE("level: readings between false signals") {
  check_table(Score::level, simulate<LevelStream>(1000, 101, 3.86));
}

TEST_CASE("precision: readings between false signals") {
  check_table(Score::precision, simulate<PrecisionStream>(800, 102, 3.86));
}

TEST_CASE("pairs: pairs between false signals of the pair chart") {
  check_table(Score::pairs, simulate<PairStream>(1000, 103, 3.86));
}
