// One analyzer in several comparisons: each pair of analyzers gets the pairs of its own, whoever else
// measured the sample.
#include "mill.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {
ComparisonSettings between(const ComparisonSettings& pattern, const char* id, std::uint32_t x,
                           std::uint32_t y) {
  ComparisonSettings comparison = pattern;
  comparison.id = comparison.title = id;
  comparison.x = {x};
  comparison.y = {y};
  return comparison;
}

/// The mill with the plant laboratory as third analyzer, compared with both lines.
std::shared_ptr<const Settings> with_laboratory() {
  auto settings = std::make_shared<Settings>(*harrow_mill());
  settings->analyzers = {{"lab", "lab"}, {"line1", "line1"}, {"line2", "line2"}};
  for (ChartSettings& chart : settings->charts) ++chart.analyzer.value;
  for (std::uint32_t standard : {1U, 0U}) {
    ChartSettings chart = settings->charts.front();
    chart.analyzer = {0};
    chart.standard = {standard};
    settings->charts.insert(settings->charts.begin(), chart);
  }
  const ComparisonSettings pattern = settings->comparisons[0];
  settings->comparisons = {between(pattern, "lab-line1", 0, 1), between(pattern, "lab-line2", 0, 2),
                           between(pattern, "lines", 1, 2)};
  return settings;
}

std::vector<Event> weeks_of_three(std::mt19937& random, int shifts) {
  std::normal_distribution<double> error(0, 0.02);
  std::uniform_real_distribution<double> product(10.0, 13.6), minutes(0, 50);
  std::vector<Event> events;
  for (int i = 0; i < shifts; ++i) {
    const double start = 8.0 * i;
    for (std::uint32_t a = 0; a < 3; ++a)
      for (std::uint32_t s = 0; s < 2; ++s)
        events.emplace_back(CheckReading{
            hour(start + minutes(random) / 60), {a}, {s}, {0}, 0, (s == 0 ? 13.4 : 10.6) + error(random)});
    for (int p = 0; p < 4; ++p) {
      const double truth = product(random);
      for (std::uint32_t a = 0; a < 3; ++a)
        if (a > 0 || p % 2 == 0)  // the laboratory measures every other sample
          events.emplace_back(SplitReading{hour(start + 2.0 * p + minutes(random) / 60),
                                           {a},
                                           "S-" + std::to_string(i * 4 + p),
                                           {0},
                                           0,
                                           truth + (a == 2 ? 0.05 : 0.0) + error(random)});
    }
  }
  std::sort(events.begin(), events.end(), happens_before);
  return events;
}
}  // namespace

TEST_CASE("a third analyzer takes part in two comparisons and changes nothing in the other") {
  const auto settings = with_laboratory();
  std::mt19937 random(41);
  auto events = weeks_of_three(random, 40);
  const Monitor all = fold_at_once(events, settings);
  CHECK(all.comparison({0}).view().pairs_total == 80);
  CHECK(all.comparison({1}).view().pairs_total == 80);
  CHECK(all.comparison({2}).view().pairs_total == 160);

  std::vector<Event> without;
  for (const Event& event : events) {
    const auto* check = std::get_if<CheckReading>(&event);
    const auto* split = std::get_if<SplitReading>(&event);
    if ((check && check->analyzer.value > 0) || (split && split->analyzer.value > 0))
      without.push_back(event);
  }
  const Monitor lines_alone = fold_at_once(without, settings);
  CHECK(lines_alone.comparison({2}).view() == all.comparison({2}).view());

  check_same(fold_in_batches(events, random, settings), all, *settings);
  std::shuffle(events.begin(), events.end(), random);
  check_same(fold_in_batches(events, random, settings), all, *settings);
}
