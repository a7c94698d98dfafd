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
    "r.note, r.flags, b.committed_at, "
    "EXISTS (SELECT 1 FROM voids v WHERE v.analyzer = r.analyzer AND v.kind = r.kind AND v.measurand = "
    "r.measurand AND v.item = r.item AND v.measured_at = r.measured_at AND v.replicate = r.replicate AND "
    "v.revision = r.revision), "
    "EXISTS (SELECT 1 FROM readings c WHERE c.analyzer = r.analyzer AND c.kind = r.kind AND c.measurand = "
    "r.measurand AND c.item = r.item AND c.measured_at = r.measured_at AND c.replicate = r.replicate AND "
    "c.revision > r.revision), "
    "(SELECT text FROM names WHERE id = r.analyzer), (SELECT text FROM names WHERE id = r.measurand), r.kind "
    "FROM readings r JOIN batches b ON b.sequence = r.batch "
    "WHERE r.measured_at >= :from AND r.measured_at < :to ";
constexpr const char* kOfAnalyzer = "AND r.analyzer = (SELECT id FROM names WHERE text = :analyzer) ";
constexpr const char* kOfKind = "AND r.kind = :kind ";
constexpr const char* kOfMeasurand = "AND r.measurand = (SELECT id FROM names WHERE text = :measurand) ";
constexpr const char* kOfItem = "AND r.item = :item ";
constexpr const char* kAfter =
    "AND (r.analyzer, r.kind, r.measurand, r.item, r.measured_at, r.replicate, r.revision) > "
    "((SELECT id FROM names WHERE text = :after_analyzer), :after_kind, "
    "(SELECT id FROM names WHERE text = :after_measurand), :after_item, :after_time, :after_replicate, "
    ":after_revision) ";
constexpr const char* kPage =
    "ORDER BY r.analyzer, r.kind, r.measurand, r.item, r.measured_at, r.replicate, r.revision LIMIT :limit";

std::string sql_of(const ReadingQuery& query) {
  return std::string(kReadings) + (query.analyzer.empty() ? "" : kOfAnalyzer) + (query.kind ? kOfKind : "") +
         (query.measurand.empty() ? "" : kOfMeasurand) + (query.item.empty() ? "" : kOfItem) +
         (query.after ? kAfter : "") + kPage;
}

void bind_query(SQLite::Statement& rows, const ReadingQuery& query) {
  rows.bind(":from", milliseconds(query.from.value_or(Instant::min())));
  rows.bind(":to", milliseconds(query.to.value_or(Instant::max())));
  if (!query.analyzer.empty()) rows.bind(":analyzer", query.analyzer);
  if (query.kind) rows.bind(":kind", static_cast<int>(*query.kind));
  if (!query.measurand.empty()) rows.bind(":measurand", query.measurand);
  if (!query.item.empty()) rows.bind(":item", query.item);
  if (query.after) {
    rows.bind(":after_analyzer", query.after->analyzer);
    rows.bind(":after_kind", static_cast<int>(query.after->kind));
    rows.bind(":after_measurand", query.after->measurand);
    rows.bind(":after_item", query.after->item);
    rows.bind(":after_time", milliseconds(query.after->measured_at));
    rows.bind(":after_replicate", query.after->replicate);
    rows.bind(":after_revision", query.after->revision);
  }
  rows.bind(":limit", query.limit);
}

ReadingRow reading_row(SQLite::Statement& row) {
  ReadingRow r;
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
  r.corrected = row.getColumn(13).getInt() != 0;
  r.analyzer = row.getColumn(14).getString();
  r.measurand = row.getColumn(15).getString();
  r.kind = static_cast<StoredKind>(row.getColumn(16).getInt());
  return r;
}

}  // namespace

std::vector<ReadingRow> JournalReader::readings(const ReadingQuery& query) {
  return journal::translating(impl_->file, [&] {
    SQLite::Statement rows(*impl_->database, sql_of(query));
    bind_query(rows, query);
    std::vector<ReadingRow> found;
    while (rows.executeStep()) found.push_back(reading_row(rows));
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
