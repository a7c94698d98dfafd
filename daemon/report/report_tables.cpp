// Alerts, interventions, files, rejected rows and configurations of a period.
#include <map>

#include "core/alert/wording.hpp"
#include "daemon/printable.hpp"
#include "daemon/render/page_text.hpp"
#include "daemon/render/page_words.hpp"
#include "daemon/report/report_page.hpp"

namespace agreed {
namespace {

constexpr std::size_t kRejectedShown = 200;

std::string acknowledged_words(const Alert& alert) {
  if (!alert.acknowledged) return "";
  const Acknowledgement& by = *alert.acknowledged;
  return by.by + ", " + time_words(by.at) + (by.note.empty() ? "" : ": " + by.note);
}

/// How it stood when the period ended, and what became of it afterwards.
std::string end_words(const AlertThen& alert) {
  if (alert.then.state == AlertState::resolved)
    return time_words(*alert.then.resolved_at) + ", " + spaced(alert.then.resolved_reason);
  std::string out = std::string(to_string(alert.then.state)) + " at the end of the period";
  if (alert.now.state == AlertState::resolved)
    out += "; resolved after it, " + time_words(*alert.now.resolved_at);
  return out;
}

std::string opened_words(const Alert& alert) {
  std::string out = time_words(alert.opened_at);
  if (alert.started_at || alert.started_between)
    out += "; begun " + beginning_words(alert.started_at, alert.started_between);
  return out;
}

std::string first_line(const std::string& text) {
  return text.substr(0, text.find('\n'));
}

std::string about_words(const JournalIntervention& done) {
  std::string out = done.analyzer;
  if (!done.measurand.empty()) out += ", " + done.measurand;
  if (!done.standard.empty()) out += ", " + done.standard;
  return out;
}

}  // namespace

DataTable alerts_table(const PeriodRecord& record) {
  DataTable table{"Alerts, oldest first",
                  {"alert", "kind", "about", "opened", "what was told", "acknowledged", "resolved"},
                  {}};
  for (const AlertRecord& stored : record.alerts) {
    const AlertThen alert = alert_at_end(stored, record.period);
    table.rows.push_back({std::to_string(alert.then.id),
                          spaced(to_string(alert.then.kind)) + ", " + to_string(alert.then.severity),
                          subject_words(alert.then.subject), opened_words(alert.then),
                          first_line(alert.then.text), acknowledged_words(alert.then), end_words(alert)});
  }
  return table;
}

DataTable interventions_table(const PeriodRecord& record) {
  DataTable table{"Interventions, oldest first", {"at", "on", "what", "by", "note", "row"}, {}};
  for (const JournalIntervention& done : record.interventions)
    table.rows.push_back({time_words(done.at), about_words(done), spaced(done.kind), done.by, done.note,
                          std::to_string(done.id)});
  return table;
}

DataTable rejected_files_table(const PeriodRecord& record) {
  DataTable table{"Files of which something was rejected",
                  {"file", "name", "analyzer", "received", "rows taken", "rows rejected", "reason"},
                  {}};
  for (const FileRow& file : record.files)
    if (file.rejected > 0 || file.outcome == "rejected")
      table.rows.push_back({std::to_string(file.id), printable(file.name), file.analyzer,
                            time_words(file.received_at), std::to_string(file.accepted),
                            std::to_string(file.rejected), file.reason});
  return table;
}

DataTable rejected_rows_table(const PeriodRecord& record) {
  std::map<std::int64_t, std::string> names;
  for (const FileRow& file : record.files) names[file.id] = printable(file.name);
  DataTable table{"Rejected rows", {"file", "name", "line", "column", "text", "reason"}, {}};
  for (const RejectedRow& row : record.rejected) {
    if (table.rows.size() == kRejectedShown) break;
    table.rows.push_back(
        {std::to_string(row.file), names[row.file], row.line == 0 ? "" : std::to_string(row.line),
         row.column == 0 ? "" : std::to_string(row.column), printable(row.text), row.reason});
  }
  if (record.rejected.size() > kRejectedShown)
    table.caption = "The first " + std::to_string(kRejectedShown) + " of " +
                    std::to_string(record.rejected.size()) + " rejected rows";
  return table;
}

DataTable configurations_table(const PeriodRecord& record) {
  DataTable table{"Configurations in use, by the SHA-256 of their text", {"from", "sha256"}, {}};
  for (const RecordedConfiguration& used : record.configurations)
    table.rows.push_back({time_words(used.at), used.sha256});
  return table;
}

}  // namespace agreed
