#include "daemon/cli/report.hpp"

#include <algorithm>
#include <fstream>
#include <functional>

#include <fmt/format.h>
#include <nlohmann/json.hpp>
#include <unistd.h>

#include "core/base/rfc3339.hpp"
#include "daemon/cli/print_json.hpp"
#include "daemon/cli/with_configuration.hpp"
#include "daemon/clock.hpp"
#include "daemon/exit_codes.hpp"
#include "daemon/report/report_csv.hpp"
#include "daemon/report/report_page.hpp"

namespace agreed {
namespace {

namespace fs = std::filesystem;
using Json = nlohmann::ordered_json;

struct ReportFiles {
  fs::path page, readings, pairs, rejected;

  explicit ReportFiles(const fs::path& out) : page(out), readings(out), pairs(out), rejected(out) {
    readings.replace_extension(".csv");
    pairs.replace_extension(".pairs.csv");
    rejected.replace_extension(".rejected.csv");
  }
  [[nodiscard]] std::vector<fs::path> tables() const { return {readings, pairs, rejected}; }
};

void must_be_free(const ReportFiles& files) {
  if (files.page.extension() == ".csv")
    throw WrongUse("--out names the page; its tables get .csv beside it. Name it FILE.html.");
  std::vector<fs::path> all = files.tables();
  all.push_back(files.page);
  for (const fs::path& file : all)
    if (fs::exists(fs::symlink_status(file)))
      throw WrongUse(file.string() + " exists already; nothing is written over. Name another file.");
}

/// Written under a name of its own and renamed when it is whole.
void write_whole(const fs::path& file, const std::function<void(std::ostream&)>& write) {
  fs::path unfinished = file.parent_path() / ("." + file.filename().string());
  unfinished += "." + std::to_string(::getpid()) + ".unfinished";
  std::ofstream out(unfinished, std::ios::binary);
  write(out);
  out.close();
  if (out.fail()) {
    std::error_code ignored;
    fs::remove(unfinished, ignored);
    throw std::runtime_error("Cannot write " + file.string() + ".");
  }
  fs::rename(unfinished, file);
}

ReportPeriod period_of(const ReportCommand& command, Instant now) {
  const ReportPeriod period{command.from, std::min(command.to.value_or(now), now)};
  if (period.from >= period.to)
    throw WrongUse("The period is empty: it would end at " + to_rfc3339(period.to) + ", not after " +
                   to_rfc3339(period.from) + ".");
  return period;
}

Json to_json(const PeriodRecord& record, const ReportFiles& files) {
  Json comparisons = Json::array();
  for (std::size_t i = 0; i < record.course.comparisons.size(); ++i) {
    const ComparisonCourse& course = record.course.comparisons[i];
    Json shares = Json::object();
    for (const Verdict verdict :
         {Verdict::gathering, Verdict::inconclusive, Verdict::agreement_shown, Verdict::disagreement_shown})
      shares[to_string(verdict)] = share_of(course.verdicts, verdict);
    comparisons.push_back({{"id", record.snapshot.settings->comparisons[i].id},
                           {"pairs", course.pairs.size()},
                           {"verdict", to_string(course.end.verdict)},
                           {"shares", std::move(shares)}});
  }
  std::int64_t readings = 0;
  for (const ChartCourse& chart : record.course.charts) readings += chart.readings;
  return {{"from", to_rfc3339(record.period.from)},
          {"to", to_rfc3339(record.period.to)},
          {"page", files.page.string()},
          {"tables", {files.readings.string(), files.pairs.string(), files.rejected.string()}},
          {"empty", record.empty()},
          {"proven", record.proof.faults.empty()},
          {"faults", record.proof.faults},
          {"chain", {{"sequence", record.proof.head.sequence}, {"sha256", record.proof.head.sha256}}},
          {"comparisons", std::move(comparisons)},
          {"check_readings", readings},
          {"alerts", record.alerts.size()},
          {"interventions", record.interventions.size()},
          {"files", record.files.size()},
          {"rejected_rows", record.rejected.size()}};
}

void say(const PeriodRecord& record, const ReportFiles& files) {
  fmt::print("written  {}\n", files.page.string());
  for (const fs::path& table : files.tables()) fmt::print("         {}\n", table.string());
  if (record.empty()) fmt::print("empty    nothing was measured or received in this period\n");
  for (const std::string& fault : record.proof.faults) fmt::print("fault    {}\n", fault);
  fmt::print("head     {}:{}\n", record.proof.head.sequence, record.proof.head.sha256);
}

}  // namespace

int report_command(const ReportCommand& command) {
  return with_configuration(command.config, command.json, [&](const Config& config) {
    const Instant now = now_utc();
    const ReportPeriod period = period_of(command, now);
    const ReportFiles files(command.out);
    must_be_free(files);
    if (!fs::exists(database_of(config.state)))
      throw JournalError("There is no journal " + database_of(config.state).string() + ".", false);
    JournalReader reader(config.state);
    PeriodRecord record;
    reader.at_one_moment([&] {
      record = gather_record(reader, config, period, now);
      write_whole(files.readings, [&](std::ostream& out) { write_readings(out, reader, period); });
    });
    write_whole(files.pairs, [&](std::ostream& out) { write_pairs(out, record); });
    write_whole(files.rejected, [&](std::ostream& out) { write_rejected(out, record); });
    std::vector<std::string> names;
    for (const fs::path& table : files.tables()) names.push_back(table.filename().string());
    write_whole(files.page, [&](std::ostream& out) { out << report_page(record, names); });
    if (command.json)
      print_json(to_json(record, files));
    else
      say(record, files);
    return record.empty() || !record.proof.faults.empty() ? kAnswerIsNo : kDone;
  });
}

}  // namespace agreed
