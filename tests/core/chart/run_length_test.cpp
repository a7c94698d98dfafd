#include "core/chart/run_length.hpp"

#include <cmath>
#include <stdexcept>

#include <doctest/doctest.h>

using namespace agreed;

TEST_CASE("the limits named in the design follow from the table") {
  CHECK(limit_for(Score::level, 3650).h == doctest::Approx(4.08).epsilon(0.002));
  CHECK(limit_for(Score::precision, 3650).h == doctest::Approx(3.62).epsilon(0.002));
  CHECK(limit_for(Score::level, 2663).h == doctest::Approx(4.0).epsilon(1e-12));
  CHECK(run_length_for(Score::level, 3.3) == doctest::Approx(258));
  CHECK(run_length_for(Score::precision, 3.0) == doctest::Approx(479));
  CHECK(run_length_for(Score::pairs, 4.8) == doctest::Approx(129000));
  CHECK(run_length_for(Score::pairs_established_line, 4.6) == doctest::Approx(41540));
  CHECK(limit_for(Score::pairs_established_line, 1e5).extrapolated);
  CHECK_FALSE(limit_for(Score::level, 75100).extrapolated);
  CHECK_FALSE(limit_for(Score::level, 258).extrapolated);
}

TEST_CASE("between two entries ln(run length) is straight in h") {
  CHECK(run_length_for(Score::level, 4.1) == doctest::Approx(std::sqrt(2663.0 * 5708.0)).epsilon(1e-12));
}

TEST_CASE("beyond the table the fitted law goes on and says so") {
  const ChangeLimit far = limit_for(Score::level, 1e6);
  CHECK(far.extrapolated);
  const double fitted = far.h * far.h / 2 - 1.10 * std::log(far.h) + 1.44;
  CHECK(fitted == doctest::Approx(std::log(1e6)).epsilon(0.036 / std::log(1e6)));
  CHECK(limit_for(Score::precision, 200).extrapolated);
  CHECK(limit_for(Score::pairs, 500).extrapolated);
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
