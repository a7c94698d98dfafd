// The promise behind every limit: the chance of a false signal is nearly the same at every reading, so that a
// stretch that has just begun is no noisier than an old one. Counted by exposure: signals among the readings
// tested in streams that had not signalled before. Precision and pairs have one constant limit, and at their
// first few readings so few splits that they cannot signal as often as promised.
#include <algorithm>

#include <doctest/doctest.h>

#include "tests/core/run_lengths/simulation.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
/// Readings of a stream, by number.
struct Bin {
  int first = 0, last = 0;
  double tested = 0, signals = 0;

  /// Signals over those promised.
  [[nodiscard]] double rate(double run_length) const { return signals / tested * run_length; }
};

constexpr double kSignals = 1500;  // of each bin, hence a Monte Carlo error of 2.6 %

template <class Stream>
void follow(Stream stream, double h, int last, std::vector<Bin>& bins, std::mt19937_64& random) {
  for (int n = 1; n <= last; ++n) {
    if (!stream.take(random)) continue;
    const bool signals = stream.exceeds(h);
    for (Bin& bin : bins)
      if (bin.first <= n && n <= bin.last) {
        ++bin.tested;
        bin.signals += signals ? 1 : 0;
      }
    if (signals) return;
  }
}

/// As many streams as each bin needs; longer ones serve the earlier bins too.
template <class Stream>
std::vector<Bin> hazard(const Stream& fresh, double run_length, std::vector<Bin> bins, double wanted,
                        std::uint64_t seed) {
  const double h = limit_for(Stream::score, run_length).h;
  std::mt19937_64 random(seed);
  for (std::size_t i = bins.size(); i-- > 0;)
    while (bins[i].tested < wanted * run_length) follow(fresh, h, bins[i].last, bins, random);
  for (const Bin& bin : bins)
    MESSAGE("run length " << run_length << ", readings " << bin.first << " to " << bin.last << ": "
                          << bin.rate(run_length) << " of the promise, " << bin.signals << " signals");
  return bins;
}

/// Within 10 % of the promise.
template <class Stream>
void check_bins(const Stream& fresh, double run_length, const std::vector<Bin>& bins, std::uint64_t seed) {
  for (const Bin& bin : hazard(fresh, run_length, bins, kSignals, seed)) {
    CAPTURE(bin.first);
    CHECK(std::abs(bin.rate(run_length) - 1) < 0.1);
  }
}

/// Never more often than promised.
template <class Stream>
void check_first_bins(const Stream& fresh, double run_length, const std::vector<Bin>& bins,
                      std::uint64_t seed) {
  constexpr double wanted = 300;
  for (const Bin& bin : hazard(fresh, run_length, bins, wanted, seed))
    CHECK(bin.rate(run_length) < 1 + 3 / std::sqrt(wanted));
}

/// As promised from the 30th reading on, and before never more often.
template <class Stream>
void check_late_bins(const Stream& fresh, double run_length, std::uint64_t seed) {
  check_bins(fresh, run_length, {{30, 49}, {50, 99}, {100, 199}, {200, 400}}, seed);
  check_first_bins(fresh, run_length, {{7, 9}, {10, 19}, {20, 29}}, seed + 1);
}

template <class Stream>
void check_rare(std::uint64_t seed) {
  constexpr double run_length = 20000, wanted = 400;
  const Bin bin = hazard(Stream(), run_length, {{1, 1000}}, wanted, seed).front();
  CHECK(std::abs(bin.rate(run_length) - 1) < 0.1 + 2 / std::sqrt(wanted));
}

void check_level_bins(const LevelStream& fresh, double run_length, std::uint64_t seed) {
  check_bins(fresh, run_length, {{5, 9}, {10, 19}, {20, 49}, {50, 99}, {100, 199}, {200, 400}}, seed);
}
}  // namespace

TEST_CASE("level: the chance of a false signal is the same from the fifth reading on") {
  check_level_bins(LevelStream(), 370, 301);
  check_level_bins(LevelStream(), 2000, 303);
}

TEST_CASE("level: also when readings are as coarse as their sd") {
  // What a coarse resolution adds to the smallest scatter makes the first readings still quieter.
  check_bins(LevelStream(1.0), 370, {{10, 19}, {20, 49}, {50, 99}, {100, 199}, {200, 400}}, 316);
  check_first_bins(LevelStream(1.0), 370, {{5, 9}}, 317);
}

TEST_CASE("precision: the chance of a false signal is the same from the thirtieth reading on") {
  check_late_bins(PrecisionStream(), 370, 305);
  check_late_bins(PrecisionStream(), 2000, 307);
}

TEST_CASE("pairs: the chance of a false signal is the same from the thirtieth pair on") {
  check_late_bins(PairStream(), 370, 309);
  check_late_bins(PairStream(), 2000, 311);
}

TEST_CASE("level: a run length of 20,000 over all readings together") {
  check_rare<LevelStream>(313);
}

TEST_CASE("precision: a run length of 20,000 over all readings together") {
  check_rare<PrecisionStream>(314);
}

TEST_CASE("pairs: a run length of 20,000 over all pairs together") {
  check_rare<PairStream>(315);
}
