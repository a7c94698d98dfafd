// What the monitor is does not depend on how its events came.
#include <string>

#include "mill.hpp"

using namespace agreed;
using namespace agreed::testing;

TEST_CASE("state is a function of the set of events: batches in order") {
  const auto settings = harrow_mill();
  for (unsigned seed = 1; seed <= 6; ++seed) {
    CAPTURE(seed);
    std::mt19937 random(seed);
    const auto events = weeks(random, 60);
    check_same(fold_in_batches(events, random, settings), fold_at_once(events, settings), *settings);
  }
}

TEST_CASE("state is a function of the set of events: any order of arrival, any batches, restarts") {
  const auto settings = harrow_mill();
  for (unsigned seed = 11; seed <= 16; ++seed) {
    CAPTURE(seed);
    std::mt19937 random(seed);
    auto events = weeks(random, 30);
    const Monitor expected = fold_at_once(events, settings);
    // Neighbours change places first (files that overtake each other), then everything does.
    for (std::size_t i = 0; i + 30 < events.size(); i += 15)
      std::shuffle(events.begin() + static_cast<std::ptrdiff_t>(i),
                   events.begin() + static_cast<std::ptrdiff_t>(i + 30), random);
    check_same(fold_in_batches(events, random, settings), expected, *settings);
    std::shuffle(events.begin(), events.end(), random);
    check_same(fold_in_batches(events, random, settings), expected, *settings);

    Record record(*settings);
    record.add(events);
    Monitor restarted(settings);
    (void)restarted.fold_all(record);
    check_same(restarted, expected, *settings);
  }
}

TEST_CASE(
    "so it is with errors that grow and with lambda from replicates, late checks and samples included") {
  struct How {
    ErrorGrowth growth;
    FitMethod fit;
    ErrorSource source;
  };
  for (const How how :
       {How{ErrorGrowth::mixed, FitMethod::deming, ErrorSource::check_standards},
        How{ErrorGrowth::proportional, FitMethod::weighted_deming, ErrorSource::check_standards},
        How{ErrorGrowth::proportional, FitMethod::deming, ErrorSource::replicates}}) {
    auto changed = std::make_shared<Settings>(*harrow_mill());
    changed->comparisons[0].error_growth = how.growth;
    changed->comparisons[0].fit = how.fit;
    changed->comparisons[0].error_ratio.source = how.source;
    const std::shared_ptr<const Settings> settings = changed;
    int fits = 0;
    for (unsigned seed = 71; seed < 75; ++seed) {
      std::mt19937 random(seed);
      auto events = weeks(random, 30);
      const Monitor expected = fold_at_once(events, settings);
      fits += expected.comparison({0}).view().fit ? 1 : 0;
      check_same(fold_in_batches(events, random, settings), expected, *settings);
      std::shuffle(events.begin(), events.end(), random);
      check_same(fold_in_batches(events, random, settings), expected, *settings);
    }
    CHECK(fits >= 2);
  }
}

TEST_CASE("what is taken back was never there") {
  const auto settings = harrow_mill();
  for (unsigned seed = 21; seed <= 24; ++seed) {
    CAPTURE(seed);
    std::mt19937 random(seed);
    auto events = weeks(random, 30);
    Record record(*settings);
    record.add(events);
    Monitor monitor(settings);
    (void)monitor.apply(events, record);
    for (int i = 0; i < 10; ++i) {
      const std::size_t victim = random() % events.size();
      const Event event = events[victim];
      if (std::holds_alternative<Intervention>(event)) continue;
      if (const auto* check = std::get_if<CheckReading>(&event))
        monitor.take_back(check->analyzer, check->standard, check->measurand);
      if (const auto* split = std::get_if<SplitReading>(&event))
        monitor.take_back_split(split->analyzer, split->measurand);
      record.remove(event);
      events.erase(events.begin() + static_cast<std::ptrdiff_t>(victim));
      (void)monitor.apply({}, record);
    }
    check_same(monitor, fold_at_once(events, settings), *settings);
  }
}

TEST_CASE("findings of streams in order are the same in any batches") {
  const auto settings = harrow_mill();
  std::mt19937 random(31);
  const auto events = weeks(random, 90);
  const auto told = [&](std::size_t size) {
    Record record(*settings);
    Monitor monitor(settings);
    std::vector<std::string> findings;
    for (std::size_t first = 0; first < events.size(); first += size) {
      const std::size_t last = std::min(first + size, events.size());
      const std::vector<Event> batch(events.begin() + static_cast<std::ptrdiff_t>(first),
                                     events.begin() + static_cast<std::ptrdiff_t>(last));
      record.add(batch);
      const MonitorOutcome outcome = monitor.apply(batch, record);
      for (const Finding& f : outcome.findings)
        if (f.kind ==
            AlertKind::check_standard_unstable)  // a replicate may re-fold a comparison, never a chart
          findings.push_back(f.subject.analyzer + f.subject.standard + (f.holds ? " holds " : " ends ") +
                             std::to_string(f.at.time_since_epoch().count()));
    }
    return findings;
  };
  const auto at_once = told(events.size());
  CHECK_FALSE(at_once.empty());
  CHECK(told(1) == at_once);
  CHECK(told(7) == at_once);
}
