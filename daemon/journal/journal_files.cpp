// Files, their outcomes and rejected rows; interventions.
#include "daemon/journal/journal_impl.hpp"

namespace agreed {

using journal::Query;
using journal::Table;

std::int64_t journal::Store::analyzer_of_file(std::int64_t id) {
  if (last_file_.first == id) return last_file_.second;
  Query row = query("SELECT analyzer FROM files WHERE id = ?");
  row->bind(1, id);
  if (!row->executeStep())
    throw JournalError("File " + std::to_string(id) + " is not in the journal (a fault of ours)", false);
  // Not kept when the batch is rolled back: its id may then go to another file.
  if (id <= history.committed_id(Table::files)) last_file_ = {id, row->getColumn(0).getInt64()};
  return row->getColumn(0).getInt64();
}

bool Journal::knows_content(std::string_view analyzer, std::string_view sha256) {
  return journal::translating(impl_->file, [&] {
    const auto id = impl_->names.find(analyzer);
    if (!id) return false;
    Query row = impl_->query(
        "SELECT 1 FROM files f JOIN file_outcomes o ON o.file = f.id WHERE f.analyzer = ? AND f.sha256 = ? "
        "AND o.outcome = 'done' AND NOT EXISTS (SELECT 1 FROM rejected_rows r WHERE r.file = f.id) LIMIT 1");
    row->bind(1, *id);
    row->bind(2, std::string(sha256));
    return row->executeStep();
  });
}

std::optional<BegunFile> Journal::begun_file(const JournalFile& file) {
  return journal::translating(impl_->file, [&]() -> std::optional<BegunFile> {
    const auto analyzer = impl_->names.find(file.analyzer);
    if (!analyzer) return std::nullopt;
    Query row = impl_->query(
        "SELECT f.id, o.file IS NOT NULL FROM files f LEFT JOIN file_outcomes o ON o.file = f.id "
        "WHERE f.analyzer = ? AND f.sha256 = ? AND f.name = ? AND (o.file IS NULL OR (f.mtime_ns = ? AND "
        "(o.outcome <> 'rejected' OR "
        " ? < (SELECT committed_at + 1 FROM batches WHERE sequence = o.batch) * 1000000))) "
        "ORDER BY f.id DESC LIMIT 1");
    row->bind(1, *analyzer);
    row->bind(2, file.sha256);
    row->bind(3, file.name.data(), static_cast<int>(file.name.size()));  // a BLOB, as stored
    row->bind(4, file.mtime_ns);
    row->bind(5, file.status_ns);
    if (!row->executeStep()) return std::nullopt;
    BegunFile begun{row->getColumn(0).getInt64(), row->getColumn(1).getInt() != 0, {}};
    Query rejected = impl_->query("SELECT line, field FROM rejected_rows WHERE file = ?");
    rejected->bind(1, begun.id);
    while (rejected->executeStep())
      begun.rejected.emplace_back(rejected->getColumn(0).getUInt(), rejected->getColumn(1).getUInt());
    return begun;
  });
}

std::int64_t Journal::add_file(const JournalFile& file) {
  return impl_->in_open_batch([&] {
    const std::int64_t analyzer = impl_->names.id_of(file.analyzer);
    impl_->tallies.begin_file();
    return impl_->history.start(Table::files)
        .name(analyzer, file.analyzer)
        .bytes(file.name)
        .text(file.sha256)
        .integer(static_cast<std::int64_t>(file.size))
        .integer(file.mtime_ns)
        .insert()
        .value();
  });
}

void Journal::finish_file(std::int64_t file, std::string_view outcome, std::string_view reason) {
  impl_->in_open_batch([&] {
    impl_->history.start(Table::file_outcomes).integer(file).text(outcome).text(reason).insert();
    impl_->tallies.finish_file(outcome);
  });
}

void Journal::add_rejected_row(std::int64_t file, std::uint32_t line, std::uint32_t column,
                               std::string_view text, std::string_view reason) {
  impl_->in_open_batch([&] {
    impl_->tallies.reject(file, impl_->analyzer_of_file(file));
    impl_->history.start(Table::rejected_rows)
        .integer(file)
        .integer(line)
        .integer(column)
        .bytes(text)
        .text(reason)
        .insert();
  });
}

bool Journal::add_intervention(std::int64_t file, const JournalIntervention& intervention) {
  return impl_->in_open_batch([&] {
    return impl_->history.start(Table::interventions)
        .text(intervention.analyzer)
        .text(intervention.standard)
        .text(intervention.measurand)
        .text(intervention.kind)
        .time(intervention.at)
        .text(intervention.by)
        .text(intervention.note)
        .optional_integer(file == 0 ? std::nullopt : std::optional(file))
        .insert()
        .has_value();
  });
}

std::optional<JournalIntervention> Journal::find_intervention(const JournalIntervention& like) {
  return journal::translating(impl_->file, [&]() -> std::optional<JournalIntervention> {
    Query row = impl_->query(
        "SELECT id, by, note FROM interventions WHERE analyzer = ? AND standard = ? AND measurand = ? AND "
        "kind = ? AND at = ?");
    row->bind(1, like.analyzer);
    row->bind(2, like.standard);
    row->bind(3, like.measurand);
    row->bind(4, like.kind);
    row->bind(5, journal::milliseconds(like.at));
    if (!row->executeStep()) return std::nullopt;
    JournalIntervention known = like;
    known.id = row->getColumn(0).getInt64();
    known.by = row->getColumn(1).getString();
    known.note = row->getColumn(2).getString();
    return known;
  });
}

}  // namespace agreed
