// Makes the lines of tests/data/run_lengths.csv, where the tables of core/chart/run_length.cpp come from:
//
//   simulate_run_lengths level|precision|pairs STREAMS SEED [LARGEST_LIMIT]
//
// prints for each limit: score, limit, run length, its standard error, signals, seed. Takes 1 us a reading
// (level), 2 us (precision), 3.5 us (pairs): half an hour for 10,000 streams to a run length of 80,000.
#include <cstdio>
#include <cstdlib>
#include <string_view>

#include "tests/core/run_lengths/simulation.hpp"

using namespace agreed::test;

int main(int argc, char** argv) {
  const std::string_view score = argc > 1 ? argv[1] : "";
  if (argc < 4 || argc > 5 || (score != "level" && score != "precision" && score != "pairs")) {
    std::fprintf(stderr, "usage: simulate_run_lengths level|precision|pairs STREAMS SEED [LARGEST_LIMIT]\n");
    return 2;
  }
  const int streams = std::atoi(argv[2]);
  const std::uint64_t seed = std::strtoull(argv[3], nullptr, 10);
  const double largest = argc > 4 ? std::strtod(argv[4], nullptr) : 10;
  const auto tallies = score == "level"       ? simulate<LevelStream>(streams, seed, largest)
                       : score == "precision" ? simulate<PrecisionStream>(streams, seed, largest)
                                              : simulate<PairStream>(streams, seed, largest);
  for (const Tally& tally : tallies)
    std::printf("%s,%.2f,%.1f,%.1f,%d,%s\n", argv[1], tally.limit, tally.mean(), tally.error(), tally.signals,
                argv[3]);
  return 0;
}
