#include "core/pair/moments.hpp"

#include <deque>

#include "core/pair/window.hpp"
#include "tests/core/pair/support.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
constexpr Instant at(std::int64_t hour) {
  return Instant{std::chrono::hours(hour)};
}

void check_equal(const Moments& a, const Moments& b, double relative) {
  REQUIRE(a.n == b.n);
  CHECK_CLOSE(a.sxx, b.sxx, relative);
  CHECK_CLOSE(a.sxy, b.sxy, relative);
  CHECK_CLOSE(a.syy, b.syy, relative);
  CHECK_CLOSE(a.mean_x(), b.mean_x(), relative);
  CHECK(std::abs(a.mean_difference() - b.mean_difference()) <= relative * std::sqrt(a.sxx / a.n));
}
}  // namespace

TEST_CASE(
    "after a million random additions, removals and replacements the moments equal a fresh computation") {
  std::mt19937_64 random(20260105);
  const Plant plant;
  std::deque<Point> kept;
  Moments rolling;
  for (int i = 0; i < 1000000; ++i) {
    const auto choice = random() % 3;
    if (kept.size() < 5 || (choice == 0 && kept.size() < 300)) {
      kept.push_back(plant(random));
      rolling.add(kept.back());
    } else if (choice == 1 && kept.size() > 5) {
      rolling.remove(kept.front());
      kept.pop_front();
    } else {
      const Point in = plant(random);
      rolling.replace(kept.front(), in);
      kept.pop_front();
      kept.push_back(in);
    }
  }
  const std::vector<Point> now(kept.begin(), kept.end());
  check_equal(rolling, Moments(now), 1e-10);
}

TEST_CASE("removing down to one pair and to none leaves no rubbish") {
  Moments m;
  m.add({10, 11});
  m.add({12, 14});
  m.remove({10, 11});
  CHECK(m.n == 1);
  CHECK(m.mean_x() == 12);
  CHECK(m.mean_difference() == 2);
  CHECK(m.sxx == 0);
  m.remove({12, 14});
  CHECK(m.n == 0);
  m.add({1, 2});
  CHECK(m.mean_x() == 1);
}

TEST_CASE("a window with age, ties and gross values equals the batch at every pair") {
  std::mt19937_64 random(7);
  const Plant plant;
  Window window(40, Duration(std::chrono::hours(100)));
  std::vector<std::pair<Instant, Point>> all;
  std::int64_t hour = 0;
  for (int i = 0; i < 3000; ++i) {
    hour += static_cast<std::int64_t>(random() % 5);
    if (random() % 200 == 0) hour += 90;
    Point p = plant(random);
    if (random() % 100 == 0) p.y += 1e6;
    if (random() % 10 == 0 && !all.empty()) p = all.back().second;
    all.emplace_back(at(hour), p);
    window.insert(p, {at(hour), i + 1, 1, 1});
    std::vector<Point> expected;
    for (const auto& [when, q] : all)
      if (when >= at(hour) - std::chrono::hours(100)) expected.push_back(q);
    if (expected.size() > 40) expected.erase(expected.begin(), expected.end() - 40);
    CAPTURE(i);
    REQUIRE(window.size() == static_cast<int>(expected.size()));
    const Moments fresh(expected);
    // A gross value in the window leaves its rounding in the means (1e6 * 1e-16), not in what comes after.
    if (fresh.syy < 1e6) check_equal(window.moments(), fresh, 1e-9);
  }
}

TEST_CASE("a pair put in its place late leaves the order of time") {
  Window window(4, std::nullopt);
  for (int i = 0; i < 4; ++i) window.insert({1.0 * i, 1.0 * i}, {at(i), i + 1, 1, 1});
  window.insert({2.5, 2.5}, {at(2), 9, 1, 1}, 1);
  REQUIRE(window.size() == 4);
  CHECK(window.points()[2].x == 2.5);
  CHECK(window.points()[3].x == 3);
  CHECK(window.entries()[2].serial == 9);
  const Moments fresh(window.points());
  check_equal(window.moments(), fresh, 1e-13);
}

TEST_CASE("replicates divide the error variances by their mean reciprocal") {
  Window window(3, std::nullopt);
  window.insert({1, 1}, {at(0), 1, 0.5, 1});
  CHECK(window.error_shares().x == 0.5);
  CHECK(window.error_shares().y == 1);
  for (int i = 1; i < 4; ++i) window.insert({1, 1}, {at(i), i + 1, 1, 1});
  CHECK(window.error_shares().x == 1);
}

TEST_CASE("a restart keeps the newest pairs and counts from them") {
  Window window(10, std::nullopt);
  for (int i = 0; i < 8; ++i) window.insert({1.0 * i, 2.0 * i}, {at(i), i + 1, 1, 1});
  window.restart(3);
  CHECK(window.size() == 3);
  CHECK(window.number() == 3);
  CHECK(window.points().front().x == 5);
  window.restart(0);
  CHECK(window.size() == 0);
  CHECK(window.moments().n == 0);
}
