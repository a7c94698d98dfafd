#include "daemon/cli/past.hpp"

#include <algorithm>
#include <array>
#include <set>
#include <utility>

#include "daemon/engine/journal_events.hpp"
#include "daemon/journal/backup.hpp"
#include "daemon/journal/journal_reader.hpp"
#include "daemon/render/alert_json.hpp"
#include "daemon/render/finding_json.hpp"

namespace agreed {
namespace {

namespace fs = std::filesystem;

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
    past.events = journal_events(journal, *config.settings);
    past.readings = std::ranges::count_if(past.events, is_reading);
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
