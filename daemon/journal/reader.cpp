// Read-only views of the journal for HTTP, the sender and the command line.
#include <limits>

#include "daemon/journal/journal_impl.hpp"
#include "daemon/journal/reader_impl.hpp"

namespace agreed {
namespace {

using journal::instant;
using journal::milliseconds;

/// One short read transaction: the queries in it see the same moment.
/// Begins a transaction for reading, or is part of the one that runs.
class Moment {
 public:
  explicit Moment(SQLite::Database& database) : database_(database) { database_.exec("SAVEPOINT moment"); }
  ~Moment() { database_.tryExec("RELEASE moment"); }
  Moment(const Moment&) = delete;
  Moment& operator=(const Moment&) = delete;

 private:
  SQLite::Database& database_;
};

std::vector<StoredTransition> history_of(SQLite::Database& database, std::int64_t alert) {
  std::vector<StoredTransition> history;
  SQLite::Statement rows(database,
                         "SELECT alert, at, change, body FROM alert_transitions WHERE alert = ? ORDER BY id");
  rows.bind(1, alert);
  while (rows.executeStep())
    history.push_back({rows.getColumn(0).getInt64(), instant(rows.getColumn(1)),
                       rows.getColumn(2).getString(), rows.getColumn(3).getString()});
  return history;
}

DeliveryRow delivery(SQLite::Statement& row) {
  DeliveryRow d;
  d.message = row.getColumn(0).getString();
  d.route = row.getColumn(1).getString();
  d.type = row.getColumn(2).getString();
  d.state = row.getColumn(3).getString();
  d.created_at = instant(row.getColumn(4));
  d.tries = row.getColumn(6).getInt();
  d.last_status = row.getColumn(7).getInt();
  d.last_error = row.getColumn(8).getString();
  if (d.state == "waiting") d.next_try_at = instant(row.getColumn(5));
  if (!row.getColumn(9).isNull()) d.delivered_at = instant(row.getColumn(9));
  return d;
}

std::vector<DeliveryRow> deliveries_of(SQLite::Database& database, std::int64_t alert) {
  std::vector<DeliveryRow> deliveries;
  SQLite::Statement rows(
      database,
      "SELECT m.webhook_id, m.route, m.type, o.state, m.created_at, o.due_at, "
      "(SELECT count(*) FROM delivery_tries c WHERE c.message = m.id), l.status, l.error, "
      "(SELECT max(at) FROM delivery_tries d WHERE d.message = m.id AND d.delivered = 1) "
      "FROM messages m JOIN outbox o ON o.message = m.id LEFT JOIN delivery_tries l ON l.id = "
      "(SELECT max(id) FROM delivery_tries t WHERE t.message = m.id) WHERE m.alert = ? ORDER BY m.id");
  rows.bind(1, alert);
  while (rows.executeStep()) deliveries.push_back(delivery(rows));
  return deliveries;
}

AlertRecord record_of(SQLite::Database& database, std::int64_t alert, std::string body) {
  return {std::move(body), history_of(database, alert), deliveries_of(database, alert)};
}

std::string places(std::size_t count) {
  std::string text;
  for (std::size_t i = 0; i < count; ++i) text += i == 0 ? "?" : ",?";
  return text;
}

/// A query whose two places are a period's ends.
SQLite::Statement of_period(SQLite::Database& database, const std::string& sql, Instant from, Instant to) {
  SQLite::Statement rows(database, sql);
  rows.bind(1, milliseconds(from));
  rows.bind(2, milliseconds(to));
  return rows;
}

/// Alerts the query asks for, newest first, and the body of their newest transition.
std::vector<std::pair<std::int64_t, std::string>> select_alerts(SQLite::Database& database,
                                                                const AlertQuery& query) {
  std::string sql =
      "SELECT t.alert, t.body FROM alert_transitions t WHERE t.id = (SELECT max(u.id) FROM alert_transitions "
      "u WHERE u.alert = t.alert) AND (? = 0 OR t.alert < ?) AND t.at >= ?";
  if (!query.states.empty()) sql += " AND t.state IN (" + places(query.states.size()) + ")";
  SQLite::Statement rows(database, sql + " ORDER BY t.alert DESC LIMIT ?");
  int place = 0;
  rows.bind(++place, query.before_id);
  rows.bind(++place, query.before_id);
  rows.bind(++place, milliseconds(query.since.value_or(Instant::min())));
  for (const std::string& state : query.states) rows.bind(++place, state);
  rows.bind(++place, query.limit);
  std::vector<std::pair<std::int64_t, std::string>> found;
  while (rows.executeStep()) found.emplace_back(rows.getColumn(0).getInt64(), rows.getColumn(1).getString());
  return found;
}

RejectedRow rejected_row(SQLite::Statement& row) {
  return {row.getColumn(0).getInt64(), row.getColumn(1).getUInt(), row.getColumn(2).getUInt(),
          row.getColumn(3).getString(), row.getColumn(4).getString()};
}

std::vector<RejectedRow> rejected_rows_of(SQLite::Database& database, std::int64_t file) {
  std::vector<RejectedRow> rejected;
  SQLite::Statement rows(
      database,
      "SELECT file, line, field, text, reason FROM rejected_rows WHERE file = ? ORDER BY id LIMIT 20");
  rows.bind(1, file);
  while (rows.executeStep()) rejected.push_back(rejected_row(rows));
  return rejected;
}

FileRow file_row(SQLite::Database& database, SQLite::Statement& row) {
  FileRow f;
  f.id = row.getColumn(0).getInt64();
  f.analyzer = row.getColumn(1).getString();
  f.name = row.getColumn(2).getString();
  f.sha256 = row.getColumn(3).getString();
  f.outcome = row.getColumn(4).getString();
  f.reason = row.getColumn(5).getString();
  f.received_at = instant(row.getColumn(6));
  f.accepted = row.getColumn(7).getInt64();
  f.repeated = row.getColumn(8).getInt64();
  f.rejected = row.getColumn(9).getInt64();
  f.size = row.getColumn(10).getInt64();
  if (!row.getColumn(11).isNull()) f.committed_at = instant(row.getColumn(11));
  if (f.rejected > 0) f.rejected_rows = rejected_rows_of(database, f.id);
  return f;
}

constexpr const char* kFiles =
    "SELECT f.id, n.text, f.name, f.sha256, coalesce(o.outcome, ''), coalesce(o.reason, ''), b.committed_at, "
    "(SELECT coalesce(sum(accepted), 0) FROM arrivals a WHERE a.file = f.id), "
    "(SELECT coalesce(sum(repeated), 0) FROM arrivals a WHERE a.file = f.id), "
    "(SELECT coalesce(sum(rejected), 0) FROM arrivals a WHERE a.file = f.id), f.size, "
    "(SELECT e.committed_at FROM batches e WHERE e.sequence = o.batch) "
    "FROM files f JOIN names n ON n.id = f.analyzer JOIN batches b ON b.sequence = f.batch ";
constexpr const char* kAnyOutcome = "LEFT JOIN file_outcomes o ON o.file = f.id WHERE f.id < ?1 ";
constexpr const char* kOneOutcome =
    "JOIN file_outcomes o ON o.file = f.id WHERE f.id < ?1 AND o.file < ?1 AND o.outcome = ?3 ";
constexpr const char* kFilesOfAnalyzer = "AND f.analyzer = (SELECT id FROM names WHERE text = ?4) ";
constexpr const char* kFilesPage = "ORDER BY f.id DESC LIMIT ?2";

std::string sql_of(const FileQuery& query) {
  return std::string(kFiles) + (query.outcome.empty() ? kAnyOutcome : kOneOutcome) +
         (query.analyzer.empty() ? "" : kFilesOfAnalyzer) + kFilesPage;
}

}  // namespace

JournalReader::JournalReader(const std::filesystem::path& folder)
    : JournalReader(of_file(journal::database_file(folder))) {}
JournalReader::JournalReader(std::unique_ptr<Impl> impl) : impl_(std::move(impl)) {}
JournalReader JournalReader::of_file(const std::filesystem::path& file) {
  return JournalReader(journal::translating(file, [&] { return std::make_unique<Impl>(file); }));
}
JournalReader::~JournalReader() = default;
JournalReader::JournalReader(JournalReader&&) noexcept = default;

void JournalReader::at_one_moment(const std::function<void()>& work) {
  journal::translating(impl_->file, [&] {
    const Moment moment(*impl_->database);
    work();
  });
}

std::string JournalReader::source() {
  return journal::translating(impl_->file, [&]() -> std::string {
    SQLite::Statement row(*impl_->database, "SELECT source FROM meta");
    row.executeStep();
    return row.getColumn(0).getString();
  });
}

std::vector<AlertRecord> JournalReader::alerts(const AlertQuery& query) {
  return journal::translating(impl_->file, [&] {
    const Moment moment(*impl_->database);
    std::vector<AlertRecord> records;
    for (auto& [alert, body] : select_alerts(*impl_->database, query))
      records.push_back(record_of(*impl_->database, alert, std::move(body)));
    return records;
  });
}

std::optional<AlertRecord> JournalReader::alert(std::int64_t id) {
  return journal::translating(impl_->file, [&]() -> std::optional<AlertRecord> {
    const Moment moment(*impl_->database);
    SQLite::Statement row(*impl_->database,
                          "SELECT body FROM alert_transitions WHERE alert = ? ORDER BY id DESC LIMIT 1");
    row.bind(1, id);
    if (!row.executeStep()) return std::nullopt;
    return record_of(*impl_->database, id, row.getColumn(0).getString());
  });
}

std::optional<OutboxMessage> JournalReader::next_message(std::string_view route) {
  return journal::translating(impl_->file, [&]() -> std::optional<OutboxMessage> {
    if (!impl_->next_message)
      impl_->next_message.emplace(
          *impl_->database,
          "SELECT m.id, m.webhook_id, m.route, m.type, m.body, m.alert, m.created_at, "
          "o.due_at, o.tries FROM outbox o JOIN messages m ON m.id = o.message WHERE "
          "o.route = ? AND o.state = 'waiting' ORDER BY o.message LIMIT 1");
    journal::Query row(*impl_->next_message);
    row->bind(1, std::string(route));
    if (!row->executeStep()) return std::nullopt;
    return OutboxMessage{
        row->getColumn(0).getInt64(),  row->getColumn(1).getString(), row->getColumn(2).getString(),
        row->getColumn(3).getString(), row->getColumn(4).getString(), row->getColumn(5).getInt64(),
        instant(row->getColumn(6)),    instant(row->getColumn(7)),    row->getColumn(8).getInt()};
  });
}

std::vector<MessageCount> JournalReader::message_counts() {
  return journal::translating(impl_->file, [&] {
    SQLite::Statement rows(*impl_->database,
                           "SELECT route, state, count(*) FROM outbox GROUP BY route, state");
    std::vector<MessageCount> counts;
    while (rows.executeStep())
      counts.push_back(
          {rows.getColumn(0).getString(), rows.getColumn(1).getString(), rows.getColumn(2).getInt64()});
    return counts;
  });
}

void JournalReader::each_grown(std::string_view analyzer, const std::function<void(JournalFile&&)>& take) {
  journal::translating(impl_->file, [&] {
    SQLite::Statement rows(
        *impl_->database,
        "SELECT f.name, f.sha256, f.size, f.mtime_ns FROM files f JOIN file_outcomes o ON "
        "o.file = f.id JOIN names n ON n.id = f.analyzer WHERE o.outcome = ? AND n.text = ? "
        "ORDER BY o.file");
    rows.bind(1, kGrownOutcome);
    rows.bind(2, std::string(analyzer));
    while (rows.executeStep())
      take({std::string(analyzer), rows.getColumn(0).getString(), rows.getColumn(1).getString(),
            static_cast<std::uint64_t>(rows.getColumn(2).getInt64()), rows.getColumn(3).getInt64()});
  });
}

std::vector<FileRow> JournalReader::files(const FileQuery& query) {
  return journal::translating(impl_->file, [&] {
    const Moment moment(*impl_->database);
    SQLite::Statement rows(*impl_->database, sql_of(query));
    rows.bind(1, query.before_id == 0 ? std::numeric_limits<std::int64_t>::max() : query.before_id);
    rows.bind(2, query.limit);
    if (!query.outcome.empty()) rows.bind(3, query.outcome);
    if (!query.analyzer.empty()) rows.bind(4, query.analyzer);
    std::vector<FileRow> found;
    while (rows.executeStep()) found.push_back(file_row(*impl_->database, rows));
    return found;
  });
}

std::vector<AlertRecord> JournalReader::alerts_between(Instant from, Instant to) {
  return journal::translating(impl_->file, [&] {
    const Moment moment(*impl_->database);
    SQLite::Statement rows = of_period(
        *impl_->database,
        "SELECT alert, body FROM alert_transitions t WHERE id = (SELECT max(id) FROM alert_transitions u "
        "WHERE u.alert = t.alert) AND (t.at >= ? OR t.state <> 'resolved') AND EXISTS (SELECT 1 FROM "
        "alert_transitions v WHERE v.alert = t.alert AND v.at < ?) ORDER BY alert",
        from, to);
    std::vector<AlertRecord> found;
    while (rows.executeStep())
      found.push_back(
          record_of(*impl_->database, rows.getColumn(0).getInt64(), rows.getColumn(1).getString()));
    return found;
  });
}

std::vector<FileRow> JournalReader::files_between(Instant from, Instant to) {
  return journal::translating(impl_->file, [&] {
    const Moment moment(*impl_->database);
    SQLite::Statement rows = of_period(*impl_->database,
                                       std::string(kFiles) +
                                           "LEFT JOIN file_outcomes o ON o.file = f.id WHERE "
                                           "b.committed_at >= ? AND b.committed_at < ? ORDER BY f.id",
                                       from, to);
    std::vector<FileRow> found;
    while (rows.executeStep()) found.push_back(file_row(*impl_->database, rows));
    return found;
  });
}

void JournalReader::each_rejected_between(Instant from, Instant to,
                                          const std::function<void(RejectedRow&&)>& take) {
  journal::translating(impl_->file, [&] {
    SQLite::Statement rows =
        of_period(*impl_->database,
                  "SELECT r.file, r.line, r.field, r.text, r.reason FROM rejected_rows r JOIN files f "
                  "ON f.id = r.file JOIN batches b ON b.sequence = f.batch WHERE b.committed_at >= ? "
                  "AND b.committed_at < ? ORDER BY r.id",
                  from, to);
    while (rows.executeStep()) take(rejected_row(rows));
  });
}

std::vector<RecordedConfiguration> JournalReader::configurations() {
  return journal::translating(impl_->file, [&] {
    SQLite::Statement rows(*impl_->database, "SELECT at, sha256 FROM configurations ORDER BY id");
    std::vector<RecordedConfiguration> found;
    while (rows.executeStep()) found.push_back({instant(rows.getColumn(0)), rows.getColumn(1).getString()});
    return found;
  });
}

}  // namespace agreed
