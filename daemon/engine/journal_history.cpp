#include "daemon/engine/journal_history.hpp"

#include <algorithm>
#include <array>

namespace agreed {
namespace {

constexpr std::array<const char*, 5> kInterventions = {"recalibrated", "repaired", "consumable_changed",
                                                       "level_accepted", "noted"};  // as enumerated

/// The index of the one with this id in a list sorted by id.
template <class Index, class Item>
std::optional<Index> find_id(const std::vector<Item>& items, const std::string& id) {
  const auto found = std::lower_bound(items.begin(), items.end(), id,
                                      [](const Item& item, const std::string& key) { return item.id < key; });
  if (found == items.end() || found->id != id) return std::nullopt;
  return Index{static_cast<std::uint32_t>(found - items.begin())};
}

}  // namespace

std::optional<InterventionKind> intervention_kind_from(std::string_view name) {
  const auto found = std::find(kInterventions.begin(), kInterventions.end(), name);
  if (found == kInterventions.end()) return std::nullopt;
  return static_cast<InterventionKind>(found - kInterventions.begin());
}

const char* to_string(InterventionKind kind) {
  return kInterventions.at(static_cast<std::size_t>(kind));
}

std::optional<Intervention> intervention_from(const JournalIntervention& stored, const Settings& settings) {
  const auto analyzer = find_id<AnalyzerIndex>(settings.analyzers, stored.analyzer);
  const auto kind = intervention_kind_from(stored.kind);
  if (!analyzer || !kind) return std::nullopt;
  Intervention intervention{stored.at, *analyzer, {}, {}, *kind, stored.note};
  if (!stored.standard.empty()) {
    intervention.standard = find_id<StandardIndex>(settings.standards, stored.standard);
    if (!intervention.standard) return std::nullopt;
  }
  if (!stored.measurand.empty()) {
    intervention.measurand = find_id<MeasurandIndex>(settings.measurands, stored.measurand);
    if (!intervention.measurand) return std::nullopt;
  }
  return intervention;
}

std::vector<CheckReading> JournalHistory::checks(ChartIndex chart) {
  const ChartSettings& of = settings_.of(chart);
  std::vector<CheckReading> readings;
  journal_.each_check(settings_.of(of.analyzer).id, settings_.of(of.standard).id,
                      settings_.of(of.measurand).id, [&](Instant at, std::int32_t replicate, double value) {
                        step();
                        readings.push_back({at, of.analyzer, of.standard, of.measurand, replicate, value});
                      });
  return readings;
}

std::vector<SplitReading> JournalHistory::splits(ComparisonIndex comparison) {
  const ComparisonSettings& of = settings_.of(comparison);
  std::vector<SplitReading> rows;
  for (const AnalyzerIndex analyzer : {of.x, of.y})
    journal_.each_split(settings_.of(analyzer).id, settings_.of(of.measurand).id,
                        [&](std::string_view sample, Instant at, std::int32_t replicate, double value) {
                          step();
                          rows.push_back({at, analyzer, std::string(sample), of.measurand, replicate, value});
                        });
  std::stable_sort(rows.begin(), rows.end(),
                   [](const SplitReading& a, const SplitReading& b) { return a.sample < b.sample; });
  return rows;
}

void JournalHistory::each_split_received(Instant since,
                                         const std::function<void(const SplitReading&, Instant)>& take) {
  journal_.each_split_received(since, [&](std::string_view analyzer, std::string_view measurand,
                                          std::string_view sample, Instant at, Instant received) {
    const auto of = find_id<AnalyzerIndex>(settings_.analyzers, std::string(analyzer));
    const auto what = find_id<MeasurandIndex>(settings_.measurands, std::string(measurand));
    if (of && what) take({at, *of, std::string(sample), *what, 0, 0}, received);
  });
}

std::vector<SplitReading> JournalHistory::splits_of(ComparisonIndex comparison, std::string_view sample) {
  const ComparisonSettings& of = settings_.of(comparison);
  std::vector<SplitReading> rows;
  for (const AnalyzerIndex analyzer : {of.x, of.y})
    journal_.each_split_of(
        settings_.of(analyzer).id, settings_.of(of.measurand).id, sample,
        [&](Instant at, std::int32_t replicate, double value) {
          rows.push_back({at, analyzer, std::string(sample), of.measurand, replicate, value});
        });
  return rows;
}

std::vector<Intervention> JournalHistory::interventions() {
  std::vector<Intervention> interventions;
  for (const JournalIntervention& stored : journal_.interventions())
    if (const auto intervention = intervention_from(stored, settings_))
      interventions.push_back(*intervention);
  std::sort(interventions.begin(), interventions.end(),
            [](const Intervention& a, const Intervention& b) { return happens_before(a, b); });
  return interventions;
}

}  // namespace agreed
