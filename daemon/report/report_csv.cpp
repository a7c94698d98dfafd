#include "daemon/report/report_csv.hpp"

#include <array>
#include <map>

#include "core/base/number_text.hpp"
#include "core/base/rfc3339.hpp"
#include "daemon/printable.hpp"
#include "daemon/render/readings_text.hpp"

namespace agreed {
namespace {

constexpr int kPage = 5000;

void write_pair(std::ostream& out, const std::string& comparison, const CoursePair& of,
                const ComparisonView& end) {
  const PairView& pair = of.pair;
  std::vector<std::string> cells{comparison,
                                 pair.sample,
                                 to_rfc3339(pair.measured_at),
                                 exact(pair.x),
                                 exact(pair.y),
                                 std::to_string(pair.x_replicates),
                                 std::to_string(pair.y_replicates),
                                 pair.outlier ? "true" : "false",
                                 to_string(of.verdict)};
  const std::size_t before = cells.size();
  if (of.levels.empty() || end.levels.empty()) cells.resize(before + 4);
  for (std::size_t i = 0; i < of.levels.size() && i < end.levels.size(); ++i) {
    cells.resize(before);
    cells.push_back(exact(end.levels[i].level));
    for (const double value : of.levels[i]) cells.push_back(exact(value));
    if (i + 1 < of.levels.size()) out << csv_line(cells);
  }
  out << csv_line(cells);
}

}  // namespace

void write_readings(std::ostream& out, JournalReader& reader, const ReportPeriod& period) {
  out << readings_csv_head();
  ReadingQuery query;
  query.from = period.from;
  query.to = period.to;
  query.limit = kPage;
  for (;;) {
    const std::vector<ReadingRow> rows = reader.readings(query);
    out << readings_csv_lines(rows);
    if (rows.size() < static_cast<std::size_t>(kPage)) return;
    query.after = rows.back();
  }
}

void write_pairs(std::ostream& out, const PeriodRecord& record) {
  out << "comparison,sample,measured_at,x,y,x_replicates,y_replicates,set_aside,verdict,level,bias,low,"
         "high\r\n";
  const Settings& settings = *record.snapshot.settings;
  for (std::size_t i = 0; i < record.course.comparisons.size(); ++i)
    for (const CoursePair& pair : record.course.comparisons[i].pairs)
      write_pair(out, settings.comparisons[i].id, pair, record.course.comparisons[i].end);
}

void write_rejected(std::ostream& out, const PeriodRecord& record) {
  std::map<std::int64_t, const FileRow*> files;
  for (const FileRow& file : record.files) files[file.id] = &file;
  out << "file,name,analyzer,received_at,line,column,text,reason\r\n";
  for (const RejectedRow& row : record.rejected) {
    const FileRow& file = *files.at(row.file);
    out << csv_line(std::array{std::to_string(row.file), printable(file.name), file.analyzer,
                               to_rfc3339(file.received_at), std::to_string(row.line),
                               std::to_string(row.column), printable(row.text), row.reason});
  }
}

}  // namespace agreed
