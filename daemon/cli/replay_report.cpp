#include "daemon/cli/replay_report.hpp"

#include <algorithm>
#include <array>
#include <cstdint>
#include <map>

#include <fmt/format.h>
#include <nlohmann/json.hpp>

#include "core/alert/wording.hpp"
#include "core/base/rfc3339.hpp"
#include "daemon/printable.hpp"
#include "daemon/render/finding_json.hpp"

namespace agreed {
namespace {

using Json = nlohmann::ordered_json;

struct Tally {
  int now = 0, then = 0, both = 0;
  void add(const MatchedEpisodes& row) {
    now += row.now ? 1 : 0;
    then += row.then ? 1 : 0;
    both += row.now && row.then ? 1 : 0;
  }
};

const AlertEpisode& either(const MatchedEpisodes& row) {
  return row.now ? *row.now : *row.then;
}

const char* match_word(const MatchedEpisodes& row) {
  if (row.now && row.then) return "both";
  return row.now ? "now" : "then";
}

/// Kinds that the clock tells, which in a replay counts from measured_at.
bool counts_from_receipt(AlertKind kind) {
  return kind == AlertKind::check_overdue || kind == AlertKind::pairs_overdue ||
         kind == AlertKind::results_silent || kind == AlertKind::unpaired_samples;
}

/// "2026-02-05 06:00"; the heading says that all is UTC.
std::string minute(Instant at) {
  const std::string words = time_words(at);
  return words.substr(0, words.rfind(' '));
}

std::string line_of(const char* side, const AlertEpisode& episode) {
  return fmt::format("             {:<6}{:<18}{:<18}{}\n", side, minute(episode.opened_at()),
                     episode.started_at ? minute(*episode.started_at) : "-",
                     episode.ended_at ? minute(*episode.ended_at) : "still open");
}

std::string row_text(const MatchedEpisodes& row, bool beside) {
  const AlertEpisode& shown = either(row);
  const char* const word = !beside               ? ""
                           : row.now && row.then ? "matched"
                           : row.now             ? "only now"
                                                 : "only then";
  std::string text = fmt::format("{:<{}}{}, {}: {}\n", word, beside ? 11 : 0, to_string(shown.kind),
                                 to_string(shown.severity), subject_words(shown.subject));
  if (row.now) text += line_of("now", *row.now);
  if (row.then) text += line_of("then", *row.then);
  return text;
}

std::map<AlertKind, Tally> by_kind(const ReplayReport& report) {
  std::map<AlertKind, Tally> kinds;
  for (const MatchedEpisodes& row : report.alerts) kinds[either(row).kind].add(row);
  return kinds;
}

Tally all_of(const ReplayReport& report) {
  Tally all;
  for (const MatchedEpisodes& row : report.alerts) all.add(row);
  return all;
}

std::string heading(const ReplayReport& report) {
  const Past& past = report.past;
  std::string text = fmt::format("replay     {} readings, {} to {}\n", past.readings,
                                 minute(report.readings.first), time_words(report.readings.last));
  text += fmt::format("from       {}\n", past.from.string());
  text += fmt::format("through    {}\n", report.config);
  if (report.asked)
    text += fmt::format("between    {} and {}: {} readings\n", minute(report.asked->first),
                        time_words(report.asked->last), report.readings_between);
  if (past.is_journal) return text + '\n';
  text += fmt::format("files      {}; {} rows repeated, {} taken back, {} censored, {} rejected\n",
                      past.files, past.repeated, past.taken_back, past.censored, past.rejected);
  for (const RejectedPast& rejected : past.first_rejected)
    text += fmt::format("rejected   {}{}: {}\n", rejected.file,
                        rejected.line == 0 ? "" : fmt::format(", line {}", rejected.line), rejected.reason);
  return text + '\n';
}

std::string summary(const ReplayReport& report) {
  std::string text = "\nkind                         now";
  const bool beside = report.past.is_journal;
  if (beside) text += "  then  matched  only now  only then";
  text += '\n';
  const auto line = [&](const char* name, const Tally& tally) {
    text += fmt::format("{:<25}{:>7}", name, tally.now);
    if (beside)
      text += fmt::format("{:>6}{:>9}{:>10}{:>11}", tally.then, tally.both, tally.now - tally.both,
                          tally.then - tally.both);
    text += '\n';
  };
  const auto kinds = by_kind(report);
  for (const auto& [kind, tally] : kinds) line(to_string(kind), tally);
  line("all", all_of(report));
  return text;
}

std::string notes(const ReplayReport& report) {
  std::string text;
  if (std::any_of(report.alerts.begin(), report.alerts.end(),
                  [](const MatchedEpisodes& row) {
                    return (!row.now || !row.then) && counts_from_receipt(either(row).kind);
                  }) &&
      report.past.is_journal)
    text +=
        "\nWhat is overdue, silent or without a partner counts here from the time of\n"
        "measurement; then it counted from receipt. Results that came late or all at\n"
        "once differ.\n";
  if (report.past.told_not_replayed > 0)
    text += fmt::format(
        "\n{} {} of files, folders, the disk or endpoints raised then; readings\nalone cannot raise "
        "them again.\n",
        report.past.told_not_replayed, report.past.told_not_replayed == 1 ? "alert was" : "alerts were");
  return text;
}

Json time_or_null(const std::optional<Instant>& at) {
  return at ? Json(to_rfc3339(*at)) : Json(nullptr);
}

Json side_json(const std::optional<AlertEpisode>& episode) {
  if (!episode) return nullptr;
  Json steps = Json::array();
  for (const EpisodeStep& step : episode->steps)
    steps.push_back({{"change", to_string(step.change)},
                     {"at", to_rfc3339(step.at)},
                     {"severity", to_string(step.severity)}});
  return {{"opened_at", to_rfc3339(episode->opened_at())},
          {"started_at", time_or_null(episode->started_at)},
          {"ended_at", time_or_null(episode->ended_at)},
          {"resolved_reason", episode->resolved_reason},
          {"severity", to_string(episode->severity)},
          {"title", episode->title},
          {"steps", steps}};
}

Json tally_json(const Tally& tally, bool beside) {
  Json json{{"now", tally.now}};
  if (beside)
    json.update({{"then", tally.then},
                 {"matched", tally.both},
                 {"only_now", tally.now - tally.both},
                 {"only_then", tally.then - tally.both}});
  return json;
}

Json folder_json(const Past& past) {
  Json rejected = Json::array();
  for (const RejectedPast& row : past.first_rejected)
    rejected.push_back({{"file", row.file}, {"line", row.line}, {"reason", row.reason}});
  return {{"files", past.files},       {"repeated", past.repeated}, {"taken_back", past.taken_back},
          {"censored", past.censored}, {"rejected", past.rejected}, {"first_rejected", rejected}};
}

}  // namespace

std::string replay_text(const ReplayReport& report) {
  std::string text = heading(report);
  if (report.alerts.empty())
    return text +
           (report.past.is_journal ? "No alert would have been raised, and none was then.\n"
                                   : "No alert would have been raised.\n") +
           notes(report);
  text += "times in UTC       opened            began about       ended\n";
  for (const MatchedEpisodes& row : report.alerts) text += row_text(row, report.past.is_journal);
  return text + summary(report) + notes(report);
}

std::string replay_json(const ReplayReport& report) {
  const Past& past = report.past;
  Json alerts = Json::array();
  for (const MatchedEpisodes& row : report.alerts)
    alerts.push_back({{"raised", match_word(row)},
                      {"kind", to_string(either(row).kind)},
                      {"subject", Json::parse(subject_json(either(row).subject))},
                      {"now", side_json(row.now)},
                      {"then", side_json(row.then)}});
  Json kinds = Json::object();
  for (const auto& [kind, tally] : by_kind(report))
    kinds[to_string(kind)] = tally_json(tally, past.is_journal);
  Json json{{"from", past.from.string()},
            {"journal", past.is_journal},
            {"configuration", report.config},
            {"readings", past.readings},
            {"first", to_rfc3339(report.readings.first)},
            {"last", to_rfc3339(report.readings.last)},
            {"between", report.asked ? Json{{"from", to_rfc3339(report.asked->first)},
                                            {"to", to_rfc3339(report.asked->last)},
                                            {"readings", report.readings_between}}
                                     : Json(nullptr)},
            {"counts", tally_json(all_of(report), past.is_journal)},
            {"by_kind", kinds},
            {"alerts", alerts}};
  if (past.is_journal)
    json["not_replayed"] = past.told_not_replayed;
  else
    json["folder"] = folder_json(past);
  return json.dump(2, ' ', false, Json::error_handler_t::replace) + '\n';
}

}  // namespace agreed
