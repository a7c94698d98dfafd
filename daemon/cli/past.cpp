#include "daemon/cli/past.hpp"

#include <algorithm>
#include <array>
#include <set>
#include <utility>

#include "daemon/cli/with_configuration.hpp"
#include "daemon/engine/journal_history.hpp"
#include "daemon/journal/backup.hpp"
#include "daemon/journal/journal_reader.hpp"
#include "daemon/render/alert_json.hpp"
#include "daemon/render/finding_json.hpp"

namespace agreed {
namespace {

namespace fs = std::filesystem;

void read_checks(JournalReader& journal, const Settings& settings, Past& past) {
  for (const ChartSettings& chart : settings.charts)
    journal.each_check(settings.of(chart.analyzer).id, settings.of(chart.standard).id,
                       settings.of(chart.measurand).id,
                       [&](Instant at, std::int32_t replicate, double value) {
                         past.events.emplace_back(CheckReading{at, chart.analyzer, chart.standard,
                                                               chart.measurand, replicate, value});
                       });
}

/// An analyzer may be part of several comparisons of a measurand; its results count once.
void read_splits(JournalReader& journal, const Settings& settings, Past& past) {
  std::set<std::pair<AnalyzerIndex, MeasurandIndex>> streams;
  for (const ComparisonSettings& comparison : settings.comparisons) {
    streams.emplace(comparison.x, comparison.measurand);
    streams.emplace(comparison.y, comparison.measurand);
  }
  for (const auto& [analyzer, measurand] : streams)
    journal.each_split(settings.of(analyzer).id, settings.of(measurand).id,
                       [&, analyzer = analyzer, measurand = measurand](std::string_view sample, Instant at,
                                                                       std::int32_t replicate, double value) {
                         past.events.emplace_back(
                             SplitReading{at, analyzer, std::string(sample), measurand, replicate, value});
                       });
}

AlertChange change_from(const std::string& name) {
  constexpr std::array kChanges = {AlertChange::opened, AlertChange::changed, AlertChange::acknowledged,
                                   AlertChange::resolved, AlertChange::reminder};
  const auto* const found = std::find_if(kChanges.begin(), kChanges.end(),
                                         [&](AlertChange change) { return name == to_string(change); });
  return found == kChanges.end() ? AlertChange::changed : *found;
}

void read_alerts(JournalReader& journal, Past& past) {
  Episodes told;
  std::set<std::int64_t> others;
  journal.each_transition([&](PastTransition&& step) {
    const Alert alert = alert_from_json(step.transition.body);
    if (!is_replayed(alert.kind)) {
      others.insert(alert.id);
      return;
    }
    const AlertChange change = change_from(step.transition.change);
    const bool known =
        step.finding_kind == to_string(alert.kind) && step.finding_subject == subject_json(alert.subject);
    if (change == AlertChange::acknowledged)
      past.acknowledgements.push_back({step.transition.at, alert.kind, alert.subject,
                                       alert.acknowledged ? alert.acknowledged->by : std::string()});
    const bool by_people = change == AlertChange::acknowledged || alert.resolved_reason == "acknowledged";
    told.add({change, step.transition.at, true, alert},
             known && !by_people ? step.finding_at : step.transition.at);
  });
  past.told = told.take();
  past.told_not_replayed = static_cast<std::int64_t>(others.size());
}

Past read_journal(const Config& config, const fs::path& file) {
  JournalReader journal = JournalReader::of_file(file);
  Past past;
  past.from = file;
  past.is_journal = true;
  journal.at_one_moment([&] {
    read_checks(journal, *config.settings, past);
    read_splits(journal, *config.settings, past);
    past.readings = static_cast<std::int64_t>(past.events.size());
    for (const JournalIntervention& stored : journal.interventions())
      if (const auto intervention = intervention_from(stored, *config.settings))
        past.events.emplace_back(*intervention);
    read_alerts(journal, past);
  });
  return past;
}

}  // namespace

Past read_past(const Config& config, const fs::path& from) {
  std::error_code error;
  const fs::file_status status = fs::status(from, error);
  if (!fs::exists(status))
    throw JournalError("There is no journal and no folder " + from.string() + ".", false);
  if (!fs::is_directory(status)) return read_journal(config, from);
  const fs::path database = database_of(from);
  return fs::exists(database, error) ? read_journal(config, database) : read_past_folder(config, from);
}

}  // namespace agreed
