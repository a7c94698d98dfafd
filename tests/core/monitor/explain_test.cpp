// Pairs and check standards together: which analyzer moved.
#include <string>

#include "mill.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {
struct Story {
  double x = 0, y = 0;      ///< shift of line1 and of line2 per shift of eight hours since `from`
  double samples = 0;       ///< of the pairs alone
  bool drift = false;       ///< the shifts grow with time instead of being there at once
  bool checks_on_y = true;  ///< check standards are run on line2 after the start
  int from = 45, shifts = 75;
};

/// Two standards a shift on each analyzer, four pairs a shift.
std::vector<Event> told(const Story& story, unsigned seed) {
  std::mt19937 random(seed);
  std::normal_distribution<double> error(0, 0.02);
  std::uniform_real_distribution<double> product(10.0, 13.6);
  std::vector<Event> events;
  for (int i = 0; i < story.shifts; ++i) {
    const double grown = i < story.from ? 0.0 : story.drift ? (i - story.from + 1) / 30.0 : 1.0;
    const double shift[2] = {grown * story.x, grown * story.y};
    for (std::uint32_t a = 0; a < 2; ++a)
      for (std::uint32_t s = 0; s < 2; ++s)
        if (a == 0 || i < story.from || story.checks_on_y)
          events.emplace_back(CheckReading{
              hour(8.0 * i + 0.1 * a), {a}, {s}, {0}, 0, (s == 0 ? 13.4 : 10.6) + shift[a] + error(random)});
    for (int p = 0; p < 4; ++p) {
      const double truth = product(random);
      for (std::uint32_t a = 0; a < 2; ++a)
        events.emplace_back(
            SplitReading{hour(8.0 * i + 1 + p + 0.1 * a),
                         {a},
                         "S-" + std::to_string(4 * i + p),
                         {0},
                         0,
                         truth + shift[a] + (a == 1 ? grown * story.samples : 0) + error(random)});
    }
  }
  std::sort(events.begin(), events.end(), happens_before);
  return events;
}

DiagnosisView diagnosis_of(const Story& story, unsigned seed = 1) {
  const Monitor monitor = fold_at_once(told(story, seed), harrow_mill());
  const auto change = monitor.explain({0});
  REQUIRE(change);
  return change->diagnosis;
}
}  // namespace

TEST_CASE("nothing is explained while nothing is open") {
  const Monitor monitor = fold_at_once(told({}, 1), harrow_mill());
  CHECK_FALSE(monitor.explain({0}));
}

TEST_CASE("a step of line2, of line1, of both against each other, of the samples") {
  const DiagnosisView y = diagnosis_of({.y = 0.4});
  CHECK(y.moved == Moved::y);
  CHECK(y.probability >= 0.9);
  CHECK(*y.shift_pairs == doctest::Approx(0.4).epsilon(0.05));
  CHECK(*y.shift_y == doctest::Approx(0.4).epsilon(0.05));
  CHECK(std::abs(*y.shift_x) < 4 * *y.se_x);
  CHECK(y.started_at == hour(8.0 * 45 + 1.1));
  CHECK(y.pairs_before == 180);
  CHECK(y.pairs_after == 120);
  CHECK(y.y_readings_before == 92);  // two a shift, those of the shift of the start were before its pairs
  CHECK(y.y_readings_after == 58);
  CHECK(y.evidence.find("line2 has moved (probability") != std::string::npos);
  const DiagnosisView x = diagnosis_of({.x = 0.4});
  CHECK(x.moved == Moved::x);
  CHECK(*x.shift_pairs == doctest::Approx(-0.4).epsilon(0.05));
  CHECK(*x.shift_x == doctest::Approx(0.4).epsilon(0.05));
  CHECK(diagnosis_of({.x = -0.2, .y = 0.2}).moved == Moved::both);
  CHECK(diagnosis_of({.samples = 0.4}).moved == Moved::neither);
}

TEST_CASE("line2 drifts upward: it is line2 that moved") {
  int named = 0;
  for (unsigned seed = 1; seed <= 10; ++seed) {
    CAPTURE(seed);
    const DiagnosisView found = diagnosis_of({.y = 0.6, .drift = true}, seed);
    CHECK(found.probabilities[1] > 0.8);
    CHECK((found.moved == Moved::y || found.moved == Moved::undecided));
    CHECK(*found.shift_pairs > 0.2);
    named += found.moved == Moved::y ? 1 : 0;
  }
  CHECK(named >= 7);
}

TEST_CASE("without check readings on line2 it stays undecided and says what will decide it") {
  const DiagnosisView found = diagnosis_of({.y = 0.4, .checks_on_y = false});
  CHECK(found.moved == Moved::undecided);
  CHECK(found.probability < 0.9);
  CHECK_FALSE(found.shift_y);
  CHECK(found.y_readings_after == 0);
  CHECK(found.evidence.find("more check reading") != std::string::npos);
  CHECK(found.evidence.find("on line2 would decide it") != std::string::npos);
}

TEST_CASE("the diagnosis follows the check readings: they alone decide after the pairs have stopped") {
  const auto settings = harrow_mill();
  Record record(*settings);
  Monitor monitor(settings);
  std::vector<Event> late;
  std::vector<Event> early;
  for (const Event& event : told({.y = 0.4, .from = 45, .shifts = 60}, 3)) {
    const auto* check = std::get_if<CheckReading>(&event);
    const bool withheld = check != nullptr && check->measured_at >= hour(8.0 * 45);
    (withheld ? late : early).push_back(event);
  }
  record.add(early);
  (void)monitor.apply(early, record);
  REQUIRE(monitor.explain({0}));
  CHECK(monitor.explain({0})->diagnosis.moved == Moved::undecided);
  // Newer than all pairs, so that only the charts take them.
  for (Event& event : late) {
    auto& check = std::get<CheckReading>(event);
    check.measured_at += std::chrono::hours(8 * 16);
    record.add({event});
    const MonitorOutcome outcome = monitor.apply({event}, record);
    CHECK(outcome.comparisons_changed.empty());
    CHECK(monitor.explained_anew(outcome).size() == 1);
  }
  CHECK(monitor.explain({0})->diagnosis.moved == Moved::y);
}

TEST_CASE("biased from the first pair on: no moment, so no claim") {
  const DiagnosisView found = diagnosis_of({.y = 0.5, .from = 0, .shifts = 60});
  CHECK(found.moved == Moved::undecided);
  CHECK_FALSE(found.started_at);
  CHECK_FALSE(found.shift_pairs);
  CHECK(found.evidence.find("no one moment") != std::string::npos);
}

TEST_CASE("the same events say the same, however they came") {
  const auto settings = harrow_mill();
  for (unsigned seed = 31; seed <= 33; ++seed) {
    std::mt19937 random(seed);
    const auto events = told({.y = 0.4}, seed);
    const auto at_once = fold_at_once(events, settings).explain({0});
    const auto in_batches = fold_in_batches(events, random, settings).explain({0});
    REQUIRE(at_once);
    REQUIRE(in_batches);
    CHECK(at_once->diagnosis == in_batches->diagnosis);
    CHECK(at_once->look_back == in_batches->look_back);
  }
}
