#include "core/chart/run_length.hpp"

#include <cmath>
#include <fstream>
#include <map>
#include <sstream>
#include <stdexcept>
#include <string>

#include <doctest/doctest.h>

using namespace agreed;

namespace {
struct Pooled {
  double sum = 0, signals = 0;

  void add(double run_length, double count) {
    sum += run_length * count;
    signals += count;
  }
  [[nodiscard]] double mean() const { return sum / signals; }
};
}  // namespace

TEST_CASE("the limits of a chart read three times a day with 0.6 false alerts a year") {
  CHECK(limit_for(Score::level, 3650).h == doctest::Approx(4.08).epsilon(0.002));
  CHECK(limit_for(Score::precision, 3650).h == doctest::Approx(3.62).epsilon(0.002));
}

TEST_CASE("the tables are the simulated run lengths, pooled by signals") {
  const std::map<std::string, Score> scores = {{"level", Score::level},
                                               {"precision", Score::precision},
                                               {"pairs", Score::pairs},
                                               {"pairs_established_line", Score::pairs_established_line}};
  std::map<std::pair<std::string, double>, Pooled> pooled;
  std::ifstream file(std::string(AGREED_TEST_DATA) + "/run_lengths.csv");
  REQUIRE(file.good());
  for (std::string line; std::getline(file, line);) {
    std::istringstream fields(line);
    std::string score, limit, run_length, error, signals;
    for (std::string* field : {&score, &limit, &run_length, &error, &signals})
      std::getline(fields, *field, ',');
    if (scores.contains(score))
      pooled[{score, std::stod(limit)}].add(std::stod(run_length), std::stod(signals));
  }
  CHECK(pooled.size() == 43);
  for (const auto& [entry, sum] : pooled) {
    const Score score = scores.at(entry.first);
    CAPTURE(entry.first);
    CAPTURE(entry.second);
    CHECK(run_length_for(score, entry.second) == doctest::Approx(sum.mean()).epsilon(6e-4));
    CHECK_FALSE(limit_for(score, run_length_for(score, entry.second)).extrapolated);
    CHECK(sum.signals >= 10000);
  }
  CHECK(limit_for(Score::pairs_established_line, 1e5).extrapolated);
}

TEST_CASE("between two entries ln(run length) is straight in h") {
  const double low = run_length_for(Score::level, 4.0), high = run_length_for(Score::level, 4.2);
  CHECK(run_length_for(Score::level, 4.1) == doctest::Approx(std::sqrt(low * high)).epsilon(1e-12));
}

TEST_CASE("beyond the table the fitted law goes on and says so") {
  const ChangeLimit far = limit_for(Score::level, 1e6);
  CHECK(far.extrapolated);
  const double fitted = far.h * far.h / 2 - 1.10 * std::log(far.h) + 1.44;
  CHECK(fitted == doctest::Approx(std::log(1e6)).epsilon(0.045 / std::log(1e6)));
  CHECK(limit_for(Score::precision, 80).extrapolated);
  CHECK(limit_for(Score::pairs, 100).extrapolated);
}

TEST_CASE("limit and run length invert each other and rise together") {
  for (const Score score : {Score::level, Score::precision, Score::pairs, Score::pairs_established_line}) {
    double last = 0;
    for (double run_length = 20; run_length < 1e9; run_length *= 1.3) {
      const double h = limit_for(score, run_length).h;
      CAPTURE(run_length);
      CHECK(run_length_for(score, h) == doctest::Approx(run_length).epsilon(1e-9));
      CHECK(h > last);
      last = h;
    }
  }
}

TEST_CASE("a run length that is none is refused") {
  CHECK_THROWS_AS((void)limit_for(Score::level, 1), std::domain_error);
  CHECK_THROWS_AS((void)limit_for(Score::level, std::nan("")), std::domain_error);
  CHECK_THROWS_AS((void)run_length_for(Score::level, std::nan("")), std::domain_error);
  CHECK(limit_for(Score::level, 2).h > 0);
}
