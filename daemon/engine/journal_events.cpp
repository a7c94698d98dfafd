#include "daemon/engine/journal_events.hpp"

#include <set>
#include <utility>

#include "daemon/engine/journal_history.hpp"

namespace agreed {
namespace {

void read_checks(JournalReader& journal, const Settings& settings, std::vector<Event>& events) {
  for (const ChartSettings& chart : settings.charts)
    journal.each_check(settings.of(chart.analyzer).id, settings.of(chart.standard).id,
                       settings.of(chart.measurand).id,
                       [&](Instant at, std::int32_t replicate, double value) {
                         events.emplace_back(CheckReading{at, chart.analyzer, chart.standard, chart.measurand,
                                                          replicate, value});
                       });
}

/// An analyzer may be part of several comparisons of a measurand; its results count once.
void read_splits(JournalReader& journal, const Settings& settings, std::vector<Event>& events) {
  std::set<std::pair<AnalyzerIndex, MeasurandIndex>> streams;
  for (const ComparisonSettings& comparison : settings.comparisons) {
    streams.emplace(comparison.x, comparison.measurand);
    streams.emplace(comparison.y, comparison.measurand);
  }
  for (const auto& [analyzer, measurand] : streams)
    journal.each_split(
        settings.of(analyzer).id, settings.of(measurand).id,
        [&, analyzer = analyzer, measurand = measurand](std::string_view sample, Instant at,
                                                        std::int32_t replicate, double value) {
          events.emplace_back(SplitReading{at, analyzer, std::string(sample), measurand, replicate, value});
        });
}

}  // namespace

std::vector<Event> journal_events(JournalReader& journal, const Settings& settings) {
  std::vector<Event> events;
  read_checks(journal, settings, events);
  read_splits(journal, settings, events);
  for (const JournalIntervention& stored : journal.interventions())
    if (auto intervention = intervention_from(stored, settings))
      events.emplace_back(*std::move(intervention));
  return events;
}

}  // namespace agreed
