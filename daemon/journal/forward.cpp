#include "daemon/journal/forward.hpp"

#include "daemon/journal/journal_impl.hpp"

namespace agreed::journal {
namespace {

// The statements are prepared anew each time: `take` may throw, or read the journal itself. The order comes
// from the primary key, so nothing is sorted.
constexpr const char* kStanding =
    " AND NOT EXISTS (SELECT 1 FROM voids v WHERE v.analyzer = r.analyzer AND v.kind = "
    "r.kind AND v.measurand = r.measurand AND v.item = r.item AND v.measured_at = r.measured_at AND "
    "v.replicate = r.replicate AND v.revision = r.revision) ";
constexpr const char* kWhere =
    " FROM readings r WHERE r.analyzer = (SELECT id FROM names WHERE text = ?) AND r.kind = ? AND "
    "r.measurand = (SELECT id FROM names WHERE text = ?)";

std::string_view text_of(const SQLite::Column& column) {
  const char* text = column.getText();
  return {text, static_cast<std::size_t>(column.getBytes())};
}

}  // namespace

void each_of_item(SQLite::Database& database, StoredKind kind, std::string_view analyzer,
                  std::string_view measurand, std::string_view item, const TakeReading& take) {
  SQLite::Statement rows(database, std::string("SELECT r.measured_at, r.replicate, r.value") + kWhere +
                                       " AND r.item = ? AND r.censored = 0" + kStanding +
                                       "ORDER BY r.measured_at, r.replicate");
  rows.bind(1, std::string(analyzer));
  rows.bind(2, static_cast<int>(kind));
  rows.bind(3, std::string(measurand));
  rows.bind(4, std::string(item));
  while (rows.executeStep())
    take(instant(rows.getColumn(0)), rows.getColumn(1).getInt(), rows.getColumn(2).getDouble());
}

void each_split(SQLite::Database& database, std::string_view analyzer, std::string_view measurand,
                const TakeSplit& take) {
  SQLite::Statement rows(database, std::string("SELECT r.item, r.measured_at, r.replicate, r.value") +
                                       kWhere + " AND r.censored = 0" + kStanding +
                                       "ORDER BY r.item, r.measured_at, r.replicate");
  rows.bind(1, std::string(analyzer));
  rows.bind(2, static_cast<int>(StoredKind::split));
  rows.bind(3, std::string(measurand));
  while (rows.executeStep()) {
    const SQLite::Column sample = rows.getColumn(0);
    take(text_of(sample), instant(rows.getColumn(1)), rows.getColumn(2).getInt(),
         rows.getColumn(3).getDouble());
  }
}

std::int64_t censored_checks(SQLite::Database& database, std::string_view analyzer,
                             std::string_view measurand, std::string_view item) {
  SQLite::Statement count(
      database, std::string("SELECT count(*)") + kWhere + " AND r.item = ? AND r.censored <> 0" + kStanding);
  count.bind(1, std::string(analyzer));
  count.bind(2, static_cast<int>(StoredKind::check));
  count.bind(3, std::string(measurand));
  count.bind(4, std::string(item));
  count.executeStep();
  return count.getColumn(0).getInt64();
}

std::vector<JournalIntervention> interventions(SQLite::Database& database) {
  std::vector<JournalIntervention> all;
  SQLite::Statement rows(database,
                         "SELECT id, analyzer, standard, measurand, kind, by, note, at FROM interventions "
                         "ORDER BY at, id");
  while (rows.executeStep())
    all.push_back({rows.getColumn(0).getInt64(), rows.getColumn(1).getString(), rows.getColumn(2).getString(),
                   rows.getColumn(3).getString(), rows.getColumn(4).getString(),
                   rows.getColumn(5).getString(), rows.getColumn(6).getString(), instant(rows.getColumn(7))});
  return all;
}

std::vector<StoredTransition> last_transitions(SQLite::Database& database) {
  std::vector<StoredTransition> all;
  SQLite::Statement rows(database,
                         "SELECT alert, at, change, body FROM alert_transitions WHERE id IN "
                         "(SELECT max(id) FROM alert_transitions GROUP BY alert) ORDER BY alert");
  while (rows.executeStep())
    all.push_back({rows.getColumn(0).getInt64(), instant(rows.getColumn(1)), rows.getColumn(2).getString(),
                   rows.getColumn(3).getString()});
  return all;
}

}  // namespace agreed::journal

namespace agreed {

void Journal::each_check(std::string_view analyzer, std::string_view item, std::string_view measurand,
                         const journal::TakeReading& take) {
  journal::translating(impl_->file, [&] {
    journal::each_of_item(*impl_->database, StoredKind::check, analyzer, measurand, item, take);
  });
}

void Journal::each_split(std::string_view analyzer, std::string_view measurand,
                         const journal::TakeSplit& take) {
  journal::translating(impl_->file,
                       [&] { journal::each_split(*impl_->database, analyzer, measurand, take); });
}

void Journal::each_split_of(std::string_view analyzer, std::string_view measurand, std::string_view sample,
                            const journal::TakeReading& take) {
  journal::translating(impl_->file, [&] {
    journal::each_of_item(*impl_->database, StoredKind::split, analyzer, measurand, sample, take);
  });
}

std::int64_t Journal::censored_checks(std::string_view analyzer, std::string_view item,
                                      std::string_view measurand) {
  return journal::translating(
      impl_->file, [&] { return journal::censored_checks(*impl_->database, analyzer, measurand, item); });
}

void Journal::each_split_received(
    Instant since,
    const std::function<void(std::string_view, std::string_view, std::string_view, Instant, Instant)>& take) {
  journal::translating(impl_->file, [&] {
    SQLite::Statement rows(
        *impl_->database,
        "SELECT a.text, m.text, r.item, r.measured_at, b.committed_at FROM readings r "
        "JOIN batches b ON b.sequence = r.batch JOIN names a ON a.id = r.analyzer "
        "JOIN names m ON m.id = r.measurand WHERE r.kind = 1 AND r.batch >= "
        "(SELECT min(sequence) FROM batches WHERE committed_at > ?1) AND b.committed_at > ?1 "
        "ORDER BY r.batch, r.position");
    rows.bind(1, journal::milliseconds(since));
    while (rows.executeStep())
      take(rows.getColumn(0).getString(), rows.getColumn(1).getString(), rows.getColumn(2).getString(),
           journal::instant(rows.getColumn(3)), journal::instant(rows.getColumn(4)));
  });
}

std::optional<Instant> Journal::last_commit() {
  return journal::translating(impl_->file, [&]() -> std::optional<Instant> {
    SQLite::Statement row(*impl_->database,
                          "SELECT committed_at FROM batches ORDER BY sequence DESC LIMIT 1");
    if (!row.executeStep()) return std::nullopt;
    return journal::instant(row.getColumn(0));
  });
}

std::vector<JournalIntervention> Journal::interventions() {
  return journal::translating(impl_->file, [&] { return journal::interventions(*impl_->database); });
}

std::vector<StoredTransition> Journal::last_transitions() {
  return journal::translating(impl_->file, [&] { return journal::last_transitions(*impl_->database); });
}

std::optional<Instant> Journal::last_measured(std::string_view analyzer) {
  const auto id = impl_->names.find(analyzer);
  const auto& newest = impl_->tallies.newest_measured_at;
  const auto found = id ? newest.find(*id) : newest.end();
  return found == newest.end() ? std::nullopt : std::optional(found->second);
}

}  // namespace agreed
