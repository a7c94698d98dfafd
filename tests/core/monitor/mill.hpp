#pragma once
// Harrow Mill for tests of the monitor: settings, weeks of events, a history kept in memory.
#include <algorithm>
#include <memory>
#include <random>
#include <string>
#include <vector>

#include <doctest/doctest.h>

#include "core/monitor/monitor.hpp"

namespace agreed::testing {

/// Harrow Mill: two analyzers, two standards, one comparison of protein.
inline std::shared_ptr<const Settings> harrow_mill() {
  auto settings = std::make_shared<Settings>();
  settings->site = "Harrow Mill";
  settings->analyzers = {{"line1", "line1"}, {"line2", "line2"}};
  settings->measurands = {{"protein", "Protein", "g/100 g", 3, {10.5, 13.0}, AllowableDifference{0.2, 1.5}}};
  settings->standards = {{"wheat-high", "wheat-high"}, {"wheat-low", "wheat-low"}};
  for (std::uint32_t analyzer = 0; analyzer < 2; ++analyzer)
    for (std::uint32_t standard = 0; standard < 2; ++standard) {
      ChartSettings chart;
      chart.analyzer = {analyzer};
      chart.standard = {standard};
      chart.measurand = {0};
      chart.level_run_length = chart.precision_run_length = 500;
      chart.lots = {{"2026-A", {}, {}}};
      settings->charts.push_back(chart);
    }
  ComparisonSettings comparison;
  comparison.id = comparison.title = "protein";
  comparison.measurand = {0};
  comparison.x = {0};
  comparison.y = {1};
  comparison.window_pairs = 40;
  comparison.warning_run_length = 1000;
  comparison.outlier_run_length = comparison.scatter_run_length = 2000;
  settings->comparisons = {comparison};
  return settings;
}

/// The set of events as a journal would give it.
class Record final : public History {
 public:
  explicit Record(const Settings& settings) : settings_(settings) {}

  void add(const std::vector<Event>& batch) {
    events_.insert(events_.end(), batch.begin(), batch.end());
    std::sort(events_.begin(), events_.end(), happens_before);
  }
  void remove(const Event& event) {
    std::erase_if(events_,
                  [&](const Event& e) { return !happens_before(e, event) && !happens_before(event, e); });
  }

  std::vector<CheckReading> checks(ChartIndex index) override {
    const ChartSettings& chart = settings_.of(index);
    return select<CheckReading>([&](const CheckReading& r) {
      return r.analyzer == chart.analyzer && r.standard == chart.standard && r.measurand == chart.measurand;
    });
  }
  std::vector<SplitReading> splits(ComparisonIndex index) override {
    auto rows = select<SplitReading>([&](const SplitReading& r) { return is_of(r, index); });
    std::stable_sort(rows.begin(), rows.end(),
                     [](const SplitReading& a, const SplitReading& b) { return a.sample < b.sample; });
    return rows;
  }
  std::vector<SplitReading> splits_of(ComparisonIndex index, std::string_view sample) override {
    return select<SplitReading>([&](const SplitReading& r) { return r.sample == sample && is_of(r, index); });
  }
  std::vector<Intervention> interventions() override {
    return select<Intervention>([](const Intervention&) { return true; });
  }

 private:
  [[nodiscard]] bool is_of(const SplitReading& reading, ComparisonIndex index) const {
    const ComparisonSettings& comparison = settings_.of(index);
    return reading.measurand == comparison.measurand &&
           (reading.analyzer == comparison.x || reading.analyzer == comparison.y);
  }

  template <class Kind, class Wanted>
  std::vector<Kind> select(Wanted wanted) const {
    std::vector<Kind> found;
    for (const Event& event : events_)
      if (const auto* of_kind = std::get_if<Kind>(&event); of_kind != nullptr && wanted(*of_kind))
        found.push_back(*of_kind);
    return found;
  }

  const Settings& settings_;
  std::vector<Event> events_;
};

inline Instant hour(double h) {
  return Instant{std::chrono::milliseconds(static_cast<std::int64_t>(h * 3.6e6))};
}

/// Some weeks at the mill, with a step of line2, a gross pair, replicates, and interventions now and then.
inline std::vector<Event> weeks(std::mt19937& random, int shifts) {
  std::normal_distribution<double> error(0, 0.02);
  std::uniform_real_distribution<double> product(10.0, 13.6), minutes(0, 50);
  const int step_at = static_cast<int>(random() % static_cast<unsigned>(shifts));
  std::vector<Event> events;
  for (int i = 0; i < shifts; ++i) {
    const double start = 8.0 * i, step = i >= step_at ? 0.08 : 0.0;
    for (std::uint32_t a = 0; a < 2; ++a)
      for (std::uint32_t s = 0; s < 2; ++s)
        events.emplace_back(CheckReading{hour(start + minutes(random) / 60),
                                         {a},
                                         {s},
                                         {0},
                                         0,
                                         (s == 0 ? 13.4 : 10.6) + (a == 1 ? step : 0) + error(random)});
    for (int p = 0; p < 4; ++p) {
      const double truth = product(random);
      const double gross = random() % 60 == 0 ? 0.5 : 0.0;
      const std::string sample = "S-" + std::to_string(i * 4 + p);
      for (std::uint32_t a = 0; a < 2; ++a)
        for (unsigned k = 0; k <= (random() % 8 == 0 ? 1U : 0U); ++k)
          events.emplace_back(SplitReading{hour(start + 2.0 * p + minutes(random) / 60),
                                           {a},
                                           sample,
                                           {0},
                                           static_cast<std::int32_t>(k),
                                           truth + (a == 1 ? step + gross : 0) + error(random)});
    }
    if (random() % 40 == 0)
      events.emplace_back(Intervention{hour(start + 7.5),
                                       {static_cast<std::uint32_t>(random() % 2)},
                                       {},
                                       {},
                                       InterventionKind::recalibrated,
                                       "recalibrated"});
  }
  std::sort(events.begin(), events.end(), happens_before);
  return events;
}

inline void check_same(const Monitor& a, const Monitor& b, const Settings& settings) {
  for (std::uint32_t i = 0; i < settings.charts.size(); ++i)
    REQUIRE(a.chart({i}).view() == b.chart({i}).view());
  for (std::uint32_t i = 0; i < settings.comparisons.size(); ++i) {
    REQUIRE(a.comparison({i}).view() == b.comparison({i}).view());
    REQUIRE(a.waiting({i}) == b.waiting({i}));
  }
}

inline Monitor fold_at_once(const std::vector<Event>& events,
                            const std::shared_ptr<const Settings>& settings) {
  Record record(*settings);
  record.add(events);
  Monitor monitor(settings);
  (void)monitor.apply(events, record);
  return monitor;
}

/// Cuts `events` into random batches and folds them.
inline Monitor fold_in_batches(const std::vector<Event>& events, std::mt19937& random,
                               const std::shared_ptr<const Settings>& settings) {
  Record record(*settings);
  Monitor monitor(settings);
  for (std::size_t first = 0; first < events.size();) {
    const std::size_t size =
        std::min<std::size_t>(1 + random() % (random() % 4 == 0 ? 80 : 5), events.size() - first);
    const std::vector<Event> batch(events.begin() + static_cast<std::ptrdiff_t>(first),
                                   events.begin() + static_cast<std::ptrdiff_t>(first + size));
    record.add(batch);
    (void)monitor.apply(batch, record);
    first += size;
  }
  return monitor;
}

}  // namespace agreed::testing
