#include "daemon/report/reader_history.hpp"

#include <algorithm>
#include <set>
#include <utility>

#include "daemon/engine/journal_history.hpp"

namespace agreed {

std::vector<CheckReading> ReaderHistory::checks(ChartIndex chart) {
  const ChartSettings& of = settings_.of(chart);
  std::vector<CheckReading> readings;
  reader_.each_check(settings_.of(of.analyzer).id, settings_.of(of.standard).id,
                     settings_.of(of.measurand).id, [&](Instant at, std::int32_t replicate, double value) {
                       if (at < until_)
                         readings.push_back({at, of.analyzer, of.standard, of.measurand, replicate, value});
                     });
  return readings;
}

void ReaderHistory::add_splits(AnalyzerIndex analyzer, MeasurandIndex measurand,
                               std::vector<SplitReading>& rows) {
  reader_.each_split(settings_.of(analyzer).id, settings_.of(measurand).id,
                     [&](std::string_view sample, Instant at, std::int32_t replicate, double value) {
                       if (at < until_)
                         rows.push_back({at, analyzer, std::string(sample), measurand, replicate, value});
                     });
}

std::vector<SplitReading> ReaderHistory::splits(ComparisonIndex comparison) {
  const ComparisonSettings& of = settings_.of(comparison);
  std::vector<SplitReading> rows;
  add_splits(of.x, of.measurand, rows);
  add_splits(of.y, of.measurand, rows);
  std::stable_sort(rows.begin(), rows.end(),
                   [](const SplitReading& a, const SplitReading& b) { return a.sample < b.sample; });
  return rows;
}

std::vector<SplitReading> ReaderHistory::splits_of(ComparisonIndex comparison, std::string_view sample) {
  std::vector<SplitReading> rows = splits(comparison);
  std::erase_if(rows, [&](const SplitReading& row) { return row.sample != sample; });
  return rows;
}

std::vector<Intervention> ReaderHistory::interventions() {
  std::vector<Intervention> interventions;
  for (const JournalIntervention& stored : reader_.interventions())
    if (const auto intervention = intervention_from(stored, settings_);
        intervention && intervention->at < until_)
      interventions.push_back(*intervention);
  std::sort(interventions.begin(), interventions.end(),
            [](const Intervention& a, const Intervention& b) { return happens_before(a, b); });
  return interventions;
}

std::vector<Event> ReaderHistory::events_from(Instant from) {
  std::vector<Event> events;
  for (std::uint32_t i = 0; i < settings_.charts.size(); ++i)
    for (CheckReading& reading : checks(ChartIndex{i}))
      if (reading.measured_at >= from) events.emplace_back(std::move(reading));
  std::set<std::pair<AnalyzerIndex, MeasurandIndex>> sides;
  for (const ComparisonSettings& comparison : settings_.comparisons)
    for (const AnalyzerIndex analyzer : {comparison.x, comparison.y})
      sides.emplace(analyzer, comparison.measurand);
  for (const auto& [analyzer, measurand] : sides) {
    std::vector<SplitReading> rows;
    add_splits(analyzer, measurand, rows);
    for (SplitReading& row : rows)
      if (row.measured_at >= from) events.emplace_back(std::move(row));
  }
  for (Intervention& intervention : interventions())
    if (intervention.at >= from) events.emplace_back(std::move(intervention));
  std::sort(events.begin(), events.end(),
            [](const Event& a, const Event& b) { return happens_before(a, b); });
  return events;
}

}  // namespace agreed
