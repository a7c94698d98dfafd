// Makes the lines of tests/data/run_lengths.csv, where the tables of core/chart/run_length.cpp come from:
//
//   simulate_run_lengths level|precision|pairs|pairs_established_line STREAMS SEED [LARGEST_LIMIT]
//
// prints for each limit: score, limit, run length, its standard error, signals, seed. Takes 1 us a reading
// (level), 2 us (precision), 3.5 us (pairs): half an hour for 10,000 streams to a run length of 80,000.
#include <cstdio>
#include <cstdlib>
#include <string_view>

#include "tests/core/run_lengths/simulation.hpp"

using namespace agreed::test;

namespace {
using Simulate = std::vector<Tally>(int streams, std::uint64_t seed, double largest);

Simulate* simulation_of(std::string_view score) {
  if (score == "level") return simulate<LevelStream>;
  if (score == "precision") return simulate<PrecisionStream>;
  if (score == "pairs") return simulate<PairStream>;
  return score == "pairs_established_line" ? simulate<EstablishedLineStream> : nullptr;
}
}  // namespace

int main(int argc, char** argv) {
  const std::string_view score = argc > 1 ? argv[1] : "";
  Simulate* const simulate_score = simulation_of(score);
  if (argc < 4 || argc > 5 || simulate_score == nullptr) {
    std::fprintf(stderr,
                 "usage: simulate_run_lengths level|precision|pairs|pairs_established_line STREAMS SEED "
                 "[LARGEST_LIMIT]\n");
    return 2;
  }
  const int streams = std::atoi(argv[2]);
  const std::uint64_t seed = std::strtoull(argv[3], nullptr, 10);
  const double largest = argc > 4 ? std::strtod(argv[4], nullptr) : 10;
  for (const Tally& tally : simulate_score(streams, seed, largest))
    std::printf("%s,%.2f,%.1f,%.1f,%d,%s\n", argv[1], tally.limit, tally.mean(), tally.error(), tally.signals,
                argv[3]);
  return 0;
}
