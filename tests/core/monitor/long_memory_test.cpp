// Where the monitor's bounded memory ends: what it forgot, and what came while it could not know.
#include "mill.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {

constexpr std::uint32_t kLine1 = 0, kLine2 = 1;

Event check(double h, std::uint32_t analyzer, std::uint32_t standard, double value) {
  return CheckReading{hour(h), {analyzer}, {standard}, {0}, 0, value};
}
Event split(double h, std::uint32_t analyzer, const std::string& sample, double value,
            std::int32_t replicate = 0) {
  return SplitReading{hour(h), {analyzer}, sample, {0}, replicate, value};
}

/// A check of each standard on each analyzer every hour; line2 becomes noisier with time, so that lambda
/// moves.
std::vector<Event> checks(int from, int to, std::mt19937& random) {
  std::normal_distribution<double> error(0, 0.02);
  std::vector<Event> events;
  for (int h = from; h < to; ++h)
    for (std::uint32_t a = 0; a < 2; ++a)
      for (std::uint32_t s = 0; s < 2; ++s)
        events.push_back(check(h, a, s, (s == 0 ? 13.4 : 10.6) + (1 + a * h * 0.002) * error(random)));
  return events;
}

std::vector<Event> pairs(int from, int to, std::mt19937& random) {
  std::normal_distribution<double> error(0, 0.02);
  std::uniform_real_distribution<double> product(10.0, 13.6);
  std::vector<Event> events;
  for (int h = from; h < to; ++h) {
    const double truth = product(random);
    const std::string sample = "S-" + std::to_string(h);
    events.push_back(split(h + 0.25, kLine1, sample, truth + error(random)));
    events.push_back(split(h + 0.5, kLine2, sample, truth + error(random)));
  }
  return events;
}

/// A monitor beside the history it is given.
struct Bench {
  std::shared_ptr<const Settings> settings = harrow_mill();
  Record record{*settings};
  Monitor monitor{settings};

  MonitorOutcome take(const std::vector<Event>& batch) {
    record.add(batch);
    return monitor.apply(batch, record);
  }
  void check_against_a_new_fold() {
    Monitor fresh(settings);
    (void)fresh.fold_all(record);
    for (std::uint32_t i = 0; i < settings->charts.size(); ++i)
      CHECK(monitor.chart({i}).view() == fresh.chart({i}).view());
    CHECK(monitor.comparison({0}).view() == fresh.comparison({0}).view());
  }
};

std::vector<std::string> outliers_in(const MonitorOutcome& outcome) {
  std::vector<std::string> samples;
  for (const Finding& finding : outcome.findings)
    if (finding.kind == AlertKind::pair_outlier)
      for (const auto& [name, value] : finding.details)
        if (name == "sample") samples.push_back(std::get<std::string>(value));
  return samples;
}

}  // namespace

TEST_CASE("a pair that comes with a late check of before it is judged with that check") {
  std::mt19937 random(41);
  Bench bench;
  (void)bench.take(checks(0, 30, random));
  (void)bench.take(pairs(0, 10, random));
  // Later than the last pair, earlier than the newest check: only the chart is late.
  (void)bench.take(
      {check(15.5, kLine1, 0, 13.43), split(20.25, kLine1, "S-20", 11.0), split(20.5, kLine2, "S-20", 11.1)});
  bench.check_against_a_new_fold();
}

TEST_CASE("a pair that comes with a late intervention of before it is judged with that intervention") {
  std::mt19937 random(42);
  Bench bench;
  (void)bench.take(checks(0, 30, random));
  (void)bench.take(pairs(0, 10, random));
  (void)bench.take({Intervention{hour(12), {kLine2}, {}, {}, InterventionKind::recalibrated, ""},
                    split(28.25, kLine1, "S-28", 11.0), split(28.5, kLine2, "S-28", 11.1)});
  bench.check_against_a_new_fold();
}

TEST_CASE("pairs older than the 500 points a chart keeps find the error ratio of their time") {
  std::mt19937 random(43);
  Bench bench;
  (void)bench.take(checks(0, 700, random));
  (void)bench.take({Intervention{hour(699.5), {kLine2}, {}, {}, InterventionKind::level_accepted, ""}});
  auto late = pairs(0, 700, random);
  late.push_back(split(701, kLine1, "S-701", 11.0));
  late.push_back(split(701, kLine2, "S-701", 11.1));
  for (std::size_t first = 0; first < late.size(); first += 467)
    (void)bench.take({late.begin() + static_cast<std::ptrdiff_t>(first),
                      late.begin() + static_cast<std::ptrdiff_t>(std::min(first + 467, late.size()))});
  bench.check_against_a_new_fold();
}

TEST_CASE("a half whose sample was forgotten finds it in the journal") {
  Bench bench;
  std::vector<Event> halves;
  const int count = static_cast<int>(SampleMemory::kCapacity) + 500;
  for (int i = 0; i < count; ++i) halves.push_back(split(i / 3600.0, kLine1, "S-" + std::to_string(i), 11.0));
  (void)bench.take(halves);
  for (int i = 0; i < 200; i += 40) {
    std::vector<Event> batch;
    for (int k = i; k < i + 40; ++k)
      batch.push_back(split(8 + k / 3600.0, kLine2, "S-" + std::to_string(k), 11.1));
    (void)bench.take(batch);
  }
  CHECK(bench.monitor.comparison({0}).view().pairs_total == 200);
  bench.check_against_a_new_fold();
}

TEST_CASE("a sample id that comes again does not hide its forgotten rows from a late replicate") {
  Bench bench;
  (void)bench.take({split(0, kLine1, "again", 11.0)});
  std::vector<Event> others;
  for (std::size_t i = 0; i < SampleMemory::kCapacity; ++i)
    others.push_back(split(1 + static_cast<double>(i) / 3600.0, kLine1, "S-" + std::to_string(i), 11.0));
  (void)bench.take(others);
  (void)bench.take({split(2000, kLine1, "again", 12.0)});
  (void)bench.take({split(0.5, kLine2, "again", 11.1)});
  CHECK(bench.monitor.comparison({0}).view().pairs_total == 1);
  bench.check_against_a_new_fold();
}

TEST_CASE("an outlier told of long ago is not told again because something else came late") {
  std::mt19937 random(44);
  Bench bench;
  (void)bench.take(checks(0, 900, random));
  auto events = pairs(0, 800, random);
  std::get<SplitReading>(events[2 * 60]).value += 1.5;
  std::get<SplitReading>(events[2 * 700]).value += 1.5;
  const auto told = outliers_in(bench.take(events));
  CHECK(std::count(told.begin(), told.end(), "S-60") == 1);
  CHECK(std::count(told.begin(), told.end(), "S-700") == 1);

  const MonitorOutcome late = bench.take({check(3.5, kLine1, 0, 13.4)});
  CHECK(late.comparisons_refolded.size() == 1);
  CHECK(outliers_in(late) == std::vector<std::string>{});
  // Yet the alert book can tell that both still stand.
  const auto& standing = late.set_aside.at({0});
  CHECK(std::count(standing.begin(), standing.end(), "S-60") == 1);
  CHECK(std::count(standing.begin(), standing.end(), "S-700") == 1);
}

TEST_CASE("an outlier that comes in the same batch as something late is told, once") {
  std::mt19937 random(45);
  Bench bench;
  (void)bench.take(checks(0, 200, random));
  (void)bench.take(pairs(0, 100, random));
  auto events = pairs(100, 180, random);
  std::get<SplitReading>(events[2 * 10]).value += 1.5;
  events.push_back(check(3.5, kLine1, 0, 13.4));
  // A restart gives up what is held, before the lateness could be met by a pair.
  events.push_back(Intervention{hour(179.9), {kLine1}, {}, {}, InterventionKind::repaired, ""});
  const auto told = outliers_in(bench.take(events));
  CHECK(std::count(told.begin(), told.end(), "S-110") == 1);
  CHECK(outliers_in(bench.take({check(4.5, kLine1, 0, 13.4)})) == std::vector<std::string>{});
}

TEST_CASE("whatever the order of arrival, every outlier that stands was told of") {
  for (unsigned seed = 51; seed <= 54; ++seed) {
    CAPTURE(seed);
    std::mt19937 random(seed);
    auto events = weeks(random, 40);
    for (std::size_t i = 0; i + 40 < events.size(); i += 20)
      std::shuffle(events.begin() + static_cast<std::ptrdiff_t>(i),
                   events.begin() + static_cast<std::ptrdiff_t>(i + 40), random);
    Bench bench;
    std::vector<std::string> told;
    for (std::size_t first = 0; first < events.size(); first += 9) {
      const auto batch = outliers_in(
          bench.take({events.begin() + static_cast<std::ptrdiff_t>(first),
                      events.begin() + static_cast<std::ptrdiff_t>(std::min(first + 9, events.size()))}));
      told.insert(told.end(), batch.begin(), batch.end());
    }
    for (const std::string& sample : bench.monitor.comparison({0}).set_aside())
      CHECK(std::find(told.begin(), told.end(), sample) != told.end());
  }
}
