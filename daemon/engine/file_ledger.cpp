#include "daemon/engine/file_ledger.hpp"

#include <algorithm>

#include "core/base/number_text.hpp"
#include "core/base/rfc3339.hpp"
#include "daemon/engine/journal_history.hpp"
#include "daemon/printable.hpp"

namespace agreed {
namespace {

constexpr std::int64_t kReasonsKept = 1'000;

int censoring_of(Censoring censored) {
  if (censored == Censoring::none) return 0;
  return censored == Censoring::below ? -1 : 1;
}

CheckReading check_of(const Row& row) {
  return {row.measured_at, row.analyzer, *row.standard, *row.measurand, row.replicate, row.value};
}

Event event_of(const Row& row) {
  if (row.kind == RowKind::check) return check_of(row);
  return SplitReading{row.measured_at, row.analyzer, row.item, *row.measurand, row.replicate, row.value};
}

}  // namespace

PieceAnswer FileLedger::take(const FilePiece& piece, Instant now, Journal& journal, Monitor& monitor,
                             TakenIn& taken) {
  const Hands hands{journal, monitor, taken, now};
  const Key key{piece.file.analyzer, piece.file.name, piece.file.sha256};
  if (piece.piece == 0) open_[key] = begin(piece, journal);
  const auto found = open_.find(key);
  if (found == open_.end() || found->second.next_piece != piece.piece)
    throw PieceOutOfOrder("an earlier piece of this file was not taken; the file is read again");
  OpenFile& file = found->second;
  ++file.next_piece;
  if (!file.repeated) {
    if (!piece.unusable.empty()) reject(file, {0, 0, "", piece.unusable}, hands);
    for (const Row& row : piece.rows) take_row(row, file, hands);
    for (const BadRow& bad : piece.bad) reject(file, bad, hands);
  }
  if (!piece.last) return {FileOutcome::more, now, ""};
  PieceAnswer answer = finish(piece, file, hands);
  open_.erase(found);
  return answer;
}

FileLedger::OpenFile FileLedger::begin(const FilePiece& piece, Journal& journal) const {
  const std::string& analyzer = settings_->of(piece.file.analyzer).id;
  const JournalFile record{analyzer,        piece.file.name,     piece.file.sha256,
                           piece.file.size, piece.file.mtime_ns, piece.file.status_ns};
  OpenFile file;
  // The rows of a growing file are judged one by one: its content is never known as a whole.
  file.repeated =
      !piece.growing && piece.unusable.empty() && journal.knows_content(analyzer, piece.file.sha256);
  if (const auto begun = journal.begun_file(record)) {
    file.id = begun->id;
    file.finished = begun->finished;
    file.rejected_before = {begun->rejected.begin(), begun->rejected.end()};
  } else {
    file.id = journal.add_file(record);
  }
  return file;
}

JournalReading FileLedger::keyed(const Row& row) const {
  JournalReading reading;
  reading.analyzer = settings_->of(row.analyzer).id;
  if (row.measurand) reading.measurand = settings_->of(*row.measurand).id;
  reading.item = row.item;
  reading.kind = row.kind == RowKind::check ? StoredKind::check : StoredKind::split;
  reading.measured_at = row.measured_at;
  reading.replicate = row.replicate;
  reading.value = row.value;
  reading.censored = censoring_of(row.censored);
  reading.line = row.line;
  reading.by = row.by;
  reading.note = row.note;
  reading.clock_ambiguous = row.clock_ambiguous;
  return reading;
}

void FileLedger::take_row(const Row& row, OpenFile& file, const Hands& hands) {
  switch (row.kind) {
    case RowKind::check:
    case RowKind::split:
      return take_reading(row, file, hands);
    case RowKind::void_:
      return take_void(row, file, hands);
    case RowKind::intervention:
      return take_intervention(row, file, hands);
  }
}

void FileLedger::take_reading(const Row& row, OpenFile& file, const Hands& hands) {
  const JournalRowResult result = hands.journal.add_reading(file.id, keyed(row));
  if (result.outcome == RowOutcome::conflict) {
    const std::string stands = exact(result.stored_value);
    const bool is_news = reject(file,
                                {row.line, 0, exact(row.value),
                                 "conflict: found " + exact(row.value) + ", but " + stands +
                                     " stands under the same key; take that back (kind void) first"},
                                hands);
    if (!is_news) return;
    hands.taken.findings.push_back({.kind = AlertKind::readings_conflict,
                                    .subject = {.analyzer = settings_->of(row.analyzer).id},
                                    .severity = Severity::warning,
                                    .at = row.measured_at,
                                    .details = {{"item", row.item},
                                                {"measurand", settings_->of(*row.measurand).id},
                                                {"measured_at", to_rfc3339(row.measured_at)},
                                                {"value", row.value},
                                                {"stored", result.stored_value},
                                                {"line", static_cast<double>(row.line)}}});
    return;
  }
  ++file.good;
  if (result.outcome != RowOutcome::accepted) return;
  if (row.censored == Censoring::none)
    hands.taken.events.push_back(event_of(row));
  else if (row.kind == RowKind::check)
    hands.taken.censored.push_back(check_of(row));
}

void FileLedger::take_void(const Row& row, OpenFile& file, const Hands& hands) {
  const JournalReading key = keyed(row);
  const auto all_taken_back = hands.journal.add_void(file.id, key);
  if (all_taken_back.empty() && !hands.journal.was_voided(key)) {
    reject(file,
           {row.line, 0, row.item,
            "void: no reading stands under this key (analyzer " + std::string(key.analyzer) + ", measurand " +
                std::string(key.measurand) + ", item " + row.item + ", measured_at " +
                to_rfc3339(row.measured_at) + ", replicate " + std::to_string(row.replicate) +
                "); nothing was taken back"},
           hands);
    return;
  }
  ++file.good;
  for (const VoidedReading& taken_back : all_taken_back) {
    if (taken_back.kind == StoredKind::split) {
      hands.monitor.take_back_split(row.analyzer, *row.measurand);
      continue;
    }
    const auto standard = std::find_if(settings_->standards.begin(), settings_->standards.end(),
                                       [&](const Standard& s) { return s.id == taken_back.item; });
    if (standard == settings_->standards.end()) continue;
    const StandardIndex index{static_cast<std::uint32_t>(standard - settings_->standards.begin())};
    hands.monitor.take_back(row.analyzer, index, *row.measurand);
    hands.taken.taken_back.push_back(
        {row.measured_at, row.analyzer, index, *row.measurand, row.replicate, 0});
  }
}

void FileLedger::take_intervention(const Row& row, OpenFile& file, const Hands& hands) {
  ++file.good;
  keep(row, intervention_of(row), file.id, hands.journal, hands.taken);
}

KeptIntervention FileLedger::take_told(const Row& row, Journal& journal, TakenIn& taken) const {
  const JournalIntervention told = intervention_of(row);
  const bool is_new = keep(row, told, 0, journal, taken);
  return {journal.find_intervention(told).value(), is_new};
}

JournalIntervention FileLedger::intervention_of(const Row& row) const {
  JournalIntervention stored;
  stored.analyzer = settings_->of(row.analyzer).id;
  if (row.standard) stored.standard = settings_->of(*row.standard).id;
  if (row.measurand) stored.measurand = settings_->of(*row.measurand).id;
  stored.kind = to_string(row.intervention);
  stored.by = row.by;
  stored.note = row.note;
  stored.at = row.measured_at;
  return stored;
}

bool FileLedger::keep(const Row& row, const JournalIntervention& stored, std::int64_t file, Journal& journal,
                      TakenIn& taken) {
  if (!journal.add_intervention(file, stored)) return false;
  taken.events.emplace_back(
      Intervention{row.measured_at, row.analyzer, row.standard, row.measurand, row.intervention, row.note});
  return true;
}

bool FileLedger::reject(OpenFile& file, const BadRow& bad, const Hands& hands) {
  const auto before = file.rejected_before.find({bad.line, bad.column});
  const bool is_news = before == file.rejected_before.end();
  file.news = file.news || is_news;
  if (is_news)
    hands.journal.add_rejected_row(file.id, bad.line, bad.column, bad.text, bad.reason);
  else
    file.rejected_before.erase(before);
  if (file.rejected == 0) {
    file.first_reason = bad.reason;
    file.first_line = bad.line;
    file.first_column = bad.column;
  }
  if (++file.rejected > kReasonsKept) return is_news;
  if (bad.line > 0) file.reasons += "line " + std::to_string(bad.line);
  if (bad.column > 0) file.reasons += ", column " + std::to_string(bad.column);
  if (bad.line > 0) file.reasons += ": ";
  file.reasons += bad.reason + '\n';
  return is_news;
}

PieceAnswer FileLedger::finish(const FilePiece& piece, const OpenFile& file, const Hands& hands) const {
  if (file.repeated) {
    if (!file.finished) hands.journal.finish_file(file.id, "repeated", "");
    return {FileOutcome::repeated, hands.now, ""};
  }
  if (file.rejected > 0 && (file.news || !file.finished))
    hands.taken.findings.push_back({.kind = AlertKind::file_rejected,
                                    .subject = {.analyzer = settings_->of(piece.file.analyzer).id},
                                    .severity = Severity::warning,
                                    .at = hands.now,
                                    .details = {{"file", printable(piece.file.name)},
                                                {"line", static_cast<double>(file.first_line)},
                                                {"column", static_cast<double>(file.first_column)},
                                                {"reason", file.first_reason},
                                                {"rows", static_cast<double>(file.rejected)},
                                                {"good_rows", static_cast<double>(file.good)}}});
  const bool no_good = file.rejected > 0 && file.good == 0;
  const bool unusable = piece.growing ? !piece.unusable.empty() : no_good;
  const char* const taken = piece.growing ? kGrownOutcome : "done";
  if (!file.finished)
    hands.journal.finish_file(file.id, unusable ? "rejected" : taken, unusable ? file.first_reason : "");
  if (unusable) return {FileOutcome::rejected, hands.now, file.reasons};
  return {FileOutcome::done, hands.now, ""};
}

}  // namespace agreed
