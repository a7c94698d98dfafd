// What is promised of a wish, at the default number of trials, with other luck.
#include <doctest/doctest.h>

#include "core/plan/notice.hpp"
#include "tests/core/plan/support.hpp"

using namespace agreed;
using namespace agreed::plan;
using namespace agreed::test;

TEST_CASE("remedies found with 1,000 trials hold with 4,000 others") {
  const Settings settings = shared(harrow_mill(), 1);
  constexpr double shift = 0.15, sd = 0.1;
  NoticeSearch search(settings, ChartIndex{0}, sd, 100, {shift, hours(48)}, {1000, 1000, 1});
  finish(search);
  const Notice& notice = search.notice();
  REQUIRE_FALSE(notice.met);
  const auto share = [&](const Settings& all, double size, double of_one, Duration every) {
    const int n = static_cast<int>(hours(48) / every);
    const Simulated told =
        waits_of(chart_trial(all, {0}, {size, of_one, 100}), 4000, n, 71).noticed_within(n);
    MESSAGE("told in time " << told.value << " +- " << told.standard_error);
    return told.value;
  };
  // Confirmed at one half or more with an error of 1.6 hundredths, the least of those that were.
  REQUIRE(notice.sd);
  CHECK(share(settings, shift, sd * notice.sd->factor, hours(8)) > 0.46);
  REQUIRE(notice.shift);
  CHECK(share(settings, *notice.shift, sd, hours(8)) > 0.46);
  REQUIRE(notice.every);
  Settings oftener = settings;
  oftener.charts[0].every = notice.every->every;
  CHECK(share(shared(oftener, 1), shift, sd, notice.every->every) > 0.46);
  if (notice.run_length) {
    Settings own = settings;
    own.charts[0].level_run_length = own.charts[0].precision_run_length =
        notice.run_length->in_control_run_length;
    CHECK(share(own, shift, sd, hours(8)) > 0.46);
  }
}
