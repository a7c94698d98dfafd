// Stored readings for those who look: a page at a time, or a whole stream.
#include "daemon/journal/forward.hpp"
#include "daemon/journal/journal_impl.hpp"
#include "daemon/journal/reader_impl.hpp"

namespace agreed {
namespace {

using journal::instant;
using journal::milliseconds;

constexpr const char* kReadings =
    "SELECT r.item, r.measured_at, r.replicate, r.revision, r.value, r.censored, r.file, r.line, r.by, "
    "r.note, "
    "r.flags, b.committed_at, EXISTS (SELECT 1 FROM voids v WHERE v.analyzer = r.analyzer AND v.kind = "
    "r.kind "
    "AND v.measurand = r.measurand AND v.item = r.item AND v.measured_at = r.measured_at AND v.replicate = "
    "r.replicate AND v.revision = r.revision) FROM readings r JOIN batches b ON b.sequence = r.batch "
    "WHERE r.analyzer = (SELECT id FROM names WHERE text = ?1) AND r.kind = ?2 AND "
    "r.measurand = (SELECT id FROM names WHERE text = ?3) AND r.measured_at >= ?4 AND r.measured_at < ?5 ";
constexpr const char* kOfItem = "AND r.item = ?6 ";
constexpr const char* kAfter = "AND (r.item, r.measured_at, r.replicate, r.revision) > (?7, ?8, ?9, ?10) ";
constexpr const char* kPage = "ORDER BY r.item, r.measured_at, r.replicate, r.revision LIMIT ?11";

std::string sql_of(const ReadingQuery& query) {
  return std::string(kReadings) + (query.item.empty() ? "" : kOfItem) + (query.after ? kAfter : "") + kPage;
}

void bind_query(SQLite::Statement& rows, const ReadingQuery& query) {
  rows.bind(1, query.analyzer);
  rows.bind(2, static_cast<int>(query.kind));
  rows.bind(3, query.measurand);
  rows.bind(4, milliseconds(query.from.value_or(Instant::min())));
  rows.bind(5, milliseconds(query.to.value_or(Instant::max())));
  if (!query.item.empty()) rows.bind(6, query.item);
  if (query.after) {
    rows.bind(7, query.after->item);
    rows.bind(8, milliseconds(query.after->measured_at));
    rows.bind(9, query.after->replicate);
    rows.bind(10, query.after->revision);
  }
  rows.bind(11, query.limit);
}

ReadingRow reading_row(const ReadingQuery& query, SQLite::Statement& row) {
  ReadingRow r;
  r.analyzer = query.analyzer;
  r.measurand = query.measurand;
  r.kind = query.kind;
  r.item = row.getColumn(0).getString();
  r.measured_at = instant(row.getColumn(1));
  r.replicate = row.getColumn(2).getInt();
  r.revision = row.getColumn(3).getInt64();
  r.value = row.getColumn(4).getDouble();
  r.censored = row.getColumn(5).getInt();
  r.file = row.getColumn(6).getInt64();
  r.line = row.getColumn(7).getUInt();
  r.by = row.getColumn(8).getString();
  r.note = row.getColumn(9).getString();
  r.clock_ambiguous = row.getColumn(10).getInt() != 0;
  r.received_at = instant(row.getColumn(11));
  r.voided = row.getColumn(12).getInt() != 0;
  return r;
}

}  // namespace

std::vector<ReadingRow> JournalReader::readings(const ReadingQuery& query) {
  return journal::translating(impl_->file, [&] {
    SQLite::Statement rows(*impl_->database, sql_of(query));
    bind_query(rows, query);
    std::vector<ReadingRow> found;
    while (rows.executeStep()) found.push_back(reading_row(query, rows));
    return found;
  });
}

void JournalReader::each_check(std::string_view analyzer, std::string_view item, std::string_view measurand,
                               const journal::TakeReading& take) {
  journal::translating(impl_->file, [&] {
    journal::each_of_item(*impl_->database, StoredKind::check, analyzer, measurand, item, take);
  });
}

void JournalReader::each_split(std::string_view analyzer, std::string_view measurand,
                               const journal::TakeSplit& take) {
  journal::translating(impl_->file,
                       [&] { journal::each_split(*impl_->database, analyzer, measurand, take); });
}

std::vector<JournalIntervention> JournalReader::interventions() {
  return journal::translating(impl_->file, [&] { return journal::interventions(*impl_->database); });
}

}  // namespace agreed
