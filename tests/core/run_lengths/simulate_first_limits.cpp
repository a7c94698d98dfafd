// Makes tests/data/first_limits.csv, where the limits of the level score at the first readings of a stretch
// (core/chart/run_length.cpp) come from:
//
//   simulate_first_limits STREAMS SEED
//
// For each run length of the table `level`: at the 5th, 6th, ... reading the limit which that share of the
// streams exceeds which have not signalled before (Hawkins, Qiu and Kang, J. Qual. Technol. 35 (2003) 355,
// calibrate theirs so). Prints h, readings, limit, signals, seed. 10 million streams need 1 GB and a few
// minutes.
#include <algorithm>
#include <cstdio>
#include <cstdlib>
#include <functional>

#include "tests/core/run_lengths/simulation.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
constexpr std::int64_t kFirst = kLeastForLevel, kLast = 29;
using Sizes = std::vector<float>;  // |t| of every stream at one number of readings

std::vector<Sizes> follow(std::size_t streams, std::uint64_t seed) {
  std::vector<Sizes> sizes(kLast - kFirst + 1, Sizes(streams));
  std::mt19937_64 random(seed);
  for (std::size_t i = 0; i < streams; ++i) {
    LevelStream stream;
    for (std::int64_t n = 1; n <= kLast; ++n)
      if (stream.take(random))
        sizes[static_cast<std::size_t>(n - kFirst)][i] = static_cast<float>(std::abs(stream.t()));
  }
  return sizes;
}

// The limits for one run length, one reading after the other; streams that signalled are left out from then
// on.
void print_limits(const std::vector<Sizes>& sizes, double h, std::uint64_t seed) {
  const double run_length = run_length_for(Score::level, h);
  std::vector<std::size_t> quiet(sizes.front().size());
  for (std::size_t i = 0; i < quiet.size(); ++i) quiet[i] = i;
  for (std::int64_t n = kFirst; n <= kLast; ++n) {
    const Sizes& now = sizes[static_cast<std::size_t>(n - kFirst)];
    const auto signals =
        static_cast<std::size_t>(std::llround(static_cast<double>(quiet.size()) / run_length));
    Sizes ordered(quiet.size());
    std::transform(quiet.begin(), quiet.end(), ordered.begin(), [&](std::size_t i) { return now[i]; });
    std::nth_element(ordered.begin(), ordered.begin() + static_cast<std::ptrdiff_t>(signals), ordered.end(),
                     std::greater<>());
    const float limit = ordered[signals];
    std::erase_if(quiet, [&](std::size_t i) { return now[i] > limit; });
    std::printf("%.2f,%d,%.4f,%zu,%llu\n", h, static_cast<int>(n), level_score(static_cast<double>(limit), n),
                signals, static_cast<unsigned long long>(seed));
  }
}
}  // namespace

int main(int argc, char** argv) {
  if (argc != 3) {
    std::fprintf(stderr, "usage: simulate_first_limits STREAMS SEED\n");
    return 2;
  }
  const std::uint64_t seed = std::strtoull(argv[2], nullptr, 10);
  const std::vector<Sizes> sizes = follow(std::strtoull(argv[1], nullptr, 10), seed);
  for (const double h : LevelStream::limits) print_limits(sizes, h, seed);
  return 0;
}
