#include "core/plan/notice.hpp"

#include <algorithm>
#include <cmath>
#include <stdexcept>

#include <doctest/doctest.h>

#include "tests/core/plan/support.hpp"

using namespace agreed;
using namespace agreed::plan;
using namespace agreed::test;
using doctest::Approx;

namespace {
const Trials kTrials{200, 200, 1};
constexpr double kSd = 0.1;

Notice notice_of_chart(const Settings& settings, double shift, Duration within, double sd = kSd) {
  NoticeSearch search(settings, ChartIndex{0}, sd, 60, {shift, within}, kTrials);
  double done = 0;
  while (search.step()) {
    CHECK(search.share_done() >= done - 1e-12);
    done = search.share_done();
  }
  CHECK(search.share_done() == 1);
  CHECK_FALSE(search.step());
  return search.notice();
}

/// Share told within so many readings, with other luck.
double share_within(const Settings& settings, double shift, double sd, int readings) {
  return waits_of(chart_trial(settings, {0}, {shift, sd, 60}), 400, std::max(1, readings), 55)
      .noticed_within(readings)
      .value;
}
}  // namespace

TEST_CASE("a wish that is met needs nothing, and says what smaller shift would be noticed too") {
  const Settings settings = shared(harrow_mill(), 6);
  const Notice notice = notice_of_chart(settings, 0.3, hours(80));
  CHECK(notice.met);
  CHECK(notice.readings == 10);
  CHECK(notice.first == FirstRemedy::not_needed);
  REQUIRE(notice.median);
  CHECK(notice.median->value <= 10);
  CHECK(*notice.median_time == static_cast<int>(notice.median->value) * Duration(hours(8)));
  CHECK_FALSE(notice.every);
  CHECK_FALSE(notice.run_length);
  CHECK_FALSE(notice.sd);
  REQUIRE(notice.shift);
  CHECK(*notice.shift < 0.3);
  CHECK(share_within(settings, *notice.shift, kSd, 10) > 0.44);
  CHECK(share_within(settings, 0.85 * *notice.shift, kSd, 10) < 0.5);
}

TEST_CASE("each remedy alone makes the wish come true, and a weaker one does not") {
  const Settings settings = shared(harrow_mill(), 6);
  const double shift = 0.2;
  const Notice notice = notice_of_chart(settings, -shift, hours(25));
  CHECK_FALSE(notice.met);
  CHECK(notice.readings == 3);
  CHECK(notice.share.value < 0.5);
  REQUIRE(notice.shift);
  CHECK(*notice.shift > shift);
  CHECK(share_within(settings, *notice.shift, kSd, 3) > 0.44);
  REQUIRE(notice.sd);
  CHECK(notice.sd->share.value >= 0.5);
  CHECK(share_within(settings, shift, kSd * notice.sd->factor, 3) > 0.44);
  CHECK(share_within(settings, shift, 1.2 * kSd * notice.sd->factor, 3) < 0.5);
  REQUIRE(notice.every);
  CHECK(notice.every->every < hours(8));
  CHECK(notice.every->every >= hours(2));
  Settings oftener = settings;
  oftener.charts[0].every = notice.every->every;
  oftener = shared(oftener, 6);
  CHECK(oftener.charts[0].level_run_length > settings.charts[0].level_run_length);
  CHECK(share_within(oftener, shift, kSd, static_cast<int>(hours(25) / notice.every->every)) > 0.44);
}

TEST_CASE("a shorter run length, as an own one or for all") {
  const Settings settings = shared(harrow_mill(), 0.5);  // 4,380 readings of each score
  const double shift = 0.2;
  const int readings = 5;
  const Notice notice = notice_of_chart(settings, shift, hours(8 * readings));
  REQUIRE_FALSE(notice.met);
  REQUIRE(notice.run_length);
  const RunLengthRemedy& remedy = *notice.run_length;
  MESSAGE("run length " << remedy.in_control_run_length << ", allowance "
                        << remedy.false_alerts_per_year.value_or(0));
  CHECK(remedy.in_control_run_length < 4380);
  CHECK(remedy.in_control_run_length >= 100);
  CHECK(remedy.short_one == (remedy.in_control_run_length < 1000));
  CHECK(remedy.per_year == Approx(1095 / remedy.in_control_run_length));
  Settings own = settings;
  own.charts[0].own_run_length = remedy.in_control_run_length;
  CHECK(remedy.overspends == share_alarm_budget(0.5, chart_entries(own), comparison_entries(own)).overspent);
  own.charts[0].level_run_length = own.charts[0].precision_run_length = remedy.in_control_run_length;
  CHECK(share_within(own, shift, kSd, readings) > 0.44);
  // The allowance makes the same run length, of this chart as of all.
  REQUIRE(remedy.false_alerts_per_year);
  const Settings larger = shared(harrow_mill(), *remedy.false_alerts_per_year);
  CHECK(larger.charts[0].level_run_length == Approx(remedy.in_control_run_length).epsilon(1e-9));
  CHECK(notice.first == (remedy.short_one && notice.every ? FirstRemedy::every : FirstRemedy::run_length));
}

TEST_CASE("a chart with its own run length: the allowance does not move it") {
  Settings settings = harrow_mill();
  settings.charts[0].own_run_length = 20'000;
  settings = shared(settings, 6);
  const Notice notice = notice_of_chart(settings, 0.2, hours(40));
  REQUIRE(notice.run_length);
  CHECK_FALSE(notice.run_length->false_alerts_per_year);
  REQUIRE(notice.every);
  CHECK_FALSE(notice.every->overspends);
  // With hardly more allowed than its own run length uses up, checks more often use up too much.
  settings = shared(settings, 2 * 1095 / 20'000.0 + 0.01);
  const Notice tight = notice_of_chart(settings, 0.2, hours(40));
  REQUIRE(tight.every);
  CHECK(tight.every->overspends);
}

TEST_CASE("a classical chart keeps its limits") {
  Settings settings = harrow_mill();
  settings.charts[0].method = ChartMethod::classical;
  settings.charts[0].classical.center = 12;
  settings.charts[0].classical.sigma = kSd;
  settings.charts[0].expected.readings = 250;
  const Notice notice = notice_of_chart(shared(settings, 6), 0.2, hours(24));
  CHECK_FALSE(notice.met);
  CHECK_FALSE(notice.run_length);
  CHECK(notice.every);
}

TEST_CASE("less time than one reading takes: only checks more often help") {
  const Notice notice = notice_of_chart(shared(harrow_mill(), 6), 0.5, hours(7));
  CHECK(notice.readings == 0);
  CHECK_FALSE(notice.met);
  CHECK_FALSE(notice.shift);
  CHECK_FALSE(notice.sd);
  CHECK_FALSE(notice.run_length);
  REQUIRE(notice.every);
  CHECK(notice.every->every <= hours(6));
  CHECK(notice.first == FirstRemedy::every);
}

TEST_CASE("what no single change can do is said to be so") {
  // A hundredth of the sd within a shift. (That half of them are told some time is what false alerts do.)
  Settings settings = harrow_mill();
  settings.measurands[0].decimals = 1;
  const Notice notice = notice_of_chart(shared(settings, 6), 0.001, hours(9));
  CHECK_FALSE(notice.met);
  CHECK_FALSE(notice.every);
  CHECK_FALSE(notice.run_length);
  CHECK_FALSE(notice.sd);
  CHECK(notice.first == FirstRemedy::none);
}

TEST_CASE("a comparison: whichever alert comes first, by the same remedies") {
  const Settings settings = shared(harrow_mill(), 6);
  NoticeSearch search(settings, ComparisonIndex{0}, conditions(), 60, {0.2, hours(8)}, {150, 100, 1});
  finish(search);
  const Notice& notice = search.notice();
  CHECK(notice.readings == 4);
  CHECK_FALSE(notice.met);
  REQUIRE(notice.sd);
  CHECK(notice.sd->factor < 1);
  const auto share = [&](double factor) {
    return waits_of(pair_trial(settings, {0}, conditions().with_errors(factor), {0.2, 60}), 300, 4, 9)
        .noticed_within(4)
        .value;
  };
  CHECK(share(notice.sd->factor) > 0.4);
  CHECK(share(1.25 * notice.sd->factor) < 0.5);
  REQUIRE(notice.every);
  CHECK(notice.every->every < hours(2));
  if (notice.run_length) CHECK(notice.run_length->in_control_run_length >= 101);
}

TEST_CASE("the same search twice finds the same") {
  const Settings settings = shared(harrow_mill(), 6);
  const auto found = [&] {
    NoticeSearch search(settings, ChartIndex{0}, kSd, 30, {0.2, hours(25)}, {50, 100, 1});
    finish(search);
    return search.notice();
  };
  const Notice a = found(), b = found();
  CHECK(a.share == b.share);
  REQUIRE(a.sd);
  REQUIRE(b.sd);
  CHECK(a.sd->factor == b.sd->factor);
  REQUIRE(a.every);
  REQUIRE(b.every);
  CHECK(a.every->every == b.every->every);
  CHECK(a.shift == b.shift);
}

TEST_CASE("wishes that are none are refused") {
  const Settings settings = shared(harrow_mill(), 6);
  const auto search = [&](double shift, Duration within, double sd) {
    NoticeSearch(settings, ChartIndex{0}, sd, 60, {shift, within}, kTrials);
  };
  CHECK_THROWS_AS(search(0, hours(5), 1), std::invalid_argument);
  CHECK_THROWS_AS(search(std::nan(""), hours(5), 1), std::invalid_argument);
  CHECK_THROWS_AS(search(1, hours(0), 1), std::invalid_argument);
  CHECK_THROWS_AS(search(1, hours(5), 0), std::invalid_argument);
}
