// The table itself. One row: key, type, default, why; then range, words, required, not yet available.
#include "config/schema.hpp"

namespace agreed::settings_file {
namespace {

using T = Type;

constexpr double kSecond = 1'000, kMinute = 60 * kSecond, kHour = 60 * kMinute, kDay = 24 * kHour;
constexpr double kAny = 1e300;  // "above 0" without an upper end worth naming
constexpr double kLongRun = 1e9;

constexpr std::string_view kAlertKinds =
    "check_standard_unstable|check_standard_biased|agreement_lost|agreement_drifting|agreement_unproven|"
    "sample_scatter|pair_outlier|check_overdue|pairs_overdue|results_silent|file_rejected|readings_conflict|"
    "unpaired_samples|inbox_unreachable|storage_low|delivery_failing";

constexpr SettingRow row(std::string_view key, Type type, std::string_view fallback, std::string_view why) {
  SettingRow made;
  made.key = key;
  made.type = type;
  made.fallback = fallback;
  made.why = why;
  return made;
}

using Rows = std::vector<SettingRow>;

Rows service_rows() {
  return {
      row("site", T::text, "", "names the plant on the page and in every message").required(),
      row("false_alerts_per_year", T::number, "6",
          "alarm budget of everything together; every limit follows from it")
          .within(0.01, 10'000),
      row("state", T::path, "state",
          "folder of journal, lock and backups; on a local disk, never a network share"),
      row("least_free_mb", T::number, "",
          "less free space for the state, in MB, is told; else 200, or a tenth of a small disk")
          .within(0, 1'000'000'000),
      row("page_url", T::url, "", "where people open the page, for links in alerts; else made of listen"),
      row("listen", T::section, "", "where page and API answer"),
      row("listen.address", T::address, "127.0.0.1", "only this machine unless told otherwise"),
      row("listen.port", T::whole_number, "7480", "0 picks a free one and prints it").within(0, 65'535),
      row("listen.open_to_network", T::flag, "false",
          "true lets anyone who reaches the port read, without a token"),
      row("listen.behind_proxy", T::flag, "false",
          "true when a reverse proxy brings others here: reading then needs a token on loopback too"),
  };
}

Rows analyzer_rows() {
  return {
      row("analyzers", T::named, "", "the measuring instruments, each with a drop folder of its own")
          .required(),
      row("analyzers.*.title", T::text, "", "what people call it; else its id"),
      row("analyzers.*.inbox", T::path, "", "its drop folder; must exist, is never created").required(),
      row("analyzers.*.format", T::id, "plain", "how its files are written: plain, or one of formats"),
      row("analyzers.*.zone", T::zone, "UTC", "time zone of times that come without an offset"),
      row("analyzers.*.not_before", T::time, "2000-01-01",
          "an earlier result is a wrong clock, its row is rejected"),
      row("analyzers.*.settle", T::duration, "2s",
          "a file found by a scan is read once it stood still this long")
          .within(0, kHour),
      row("analyzers.*.rescan", T::duration, "15s", "the folder is listed again this often, events or not")
          .within(kSecond, kHour),
      row("analyzers.*.mode", T::word, "",
          "written once, or one export that keeps growing; else as its format")
          .one_of("whole|growing"),
      row("analyzers.*.on_bad_row", T::word, "keep_good", "whether one bad row spoils its whole file")
          .one_of("keep_good|reject_file"),
  };
}

/// How a file of a mapped format is built.
Rows format_rows() {
  return {
      row("formats", T::named, "", "the analyzers' own exports, mapped to the plain format"),
      row("formats.*.type", T::word, "csv", "how the file is built").one_of("csv|jsonl|json"),
      row("formats.*.delimiter", T::text, ",", "between two columns: one character, or tab"),
      row("formats.*.decimal", T::text, ".", "the decimal sign: . or ,"),
      row("formats.*.thousands", T::text, "", "between groups of three digits; else there are none"),
      row("formats.*.encoding", T::word, "utf-8", "character set of the file")
          .one_of(
              "utf-8|utf-16|utf-16le|utf-16be|windows-1252|windows-1250|windows-1251|iso-8859-1|iso-8859-15"),
      row("formats.*.skip_lines", T::whole_number, "0", "lines before the header").within(0, 1'000),
      row("formats.*.header", T::flag, "true", "false: columns are named by their number, from 1"),
      row("formats.*.mode", T::word, "whole", "written once, or one export that keeps growing")
          .one_of("whole|growing"),
      row("formats.*.files", T::text, "*", "names of the files to take"),
      row("formats.*.ignore", T::text_list, "", "names of files to leave where they are"),
  };
}

/// What the columns of a mapped format mean.
Rows mapping_rows() {
  return {
      row("formats.*.time", T::section, "", "when the result was measured").required(),
      row("formats.*.time.column", T::text, "", "its column"),
      row("formats.*.time.columns", T::text_list, "", "or two, date and time; read with a space between"),
      row("formats.*.time.pattern", T::text, "", "how it is written; else RFC 3339"),
      row("formats.*.time.zone", T::zone, "", "of times without an offset; else the analyzer's"),
      row("formats.*.item", T::section, "", "what was measured"),
      row("formats.*.item.column", T::text, "", "its column").required(),
      row("formats.*.items", T::text_map, "", "names on the instrument: names here"),
      row("formats.*.kind", T::section, "", "what kind of result a row is"),
      row("formats.*.kind.check_when_item_matches", T::text, "", "pattern of the check standards' names"),
      row("formats.*.kind.otherwise", T::word, "split", "kind of all others").one_of("check|split"),
      row("formats.*.kind.column", T::text, "", "or a column that says it"),
      row("formats.*.kind.words", T::text_map, "", "its words: check, split, intervention or void"),
      row("formats.*.values", T::texts_or_sections, "", "several results a row: column of each measurand"),
      row("formats.*.values.*.column", T::text, "", "its column"),
      row("formats.*.values.*.factor", T::number, "1", "turns the instrument's unit into ours")
          .above(0, kAny),
      row("formats.*.measurand", T::section, "", "one result a row: what was measured of the item"),
      row("formats.*.measurand.column", T::text, "", "its column").required(),
      row("formats.*.measurand.names", T::text_map, "", "names on the instrument: measurands"),
      row("formats.*.value", T::section, "", "one result a row: the result"),
      row("formats.*.value.column", T::text, "", "its column").required(),
      row("formats.*.value.factor", T::number, "1", "turns the instrument's unit into ours").above(0, kAny),
      row("formats.*.x", T::section, "", "finished pairs: the result of the comparison's x"),
      row("formats.*.x.column", T::text, "", "its column").required(),
      row("formats.*.x.factor", T::number, "1", "turns its unit into ours").above(0, kAny),
      row("formats.*.y", T::section, "", "finished pairs: the result of the comparison's y"),
      row("formats.*.y.column", T::text, "", "its column").required(),
      row("formats.*.y.factor", T::number, "1", "turns its unit into ours").above(0, kAny),
      row("formats.*.columns", T::section, "", "where the rest stands, each with its column"),
      row("formats.*.columns.replicate", T::text, "", "number of the repeated measurement"),
      row("formats.*.columns.operator", T::text, "", "who measured"),
      row("formats.*.columns.note", T::text, "", "what was noted"),
      row("formats.*.columns.analyzer", T::text, "", "must name the folder's analyzer"),
      row("formats.*.columns.standard", T::text, "", "check standard of an intervention"),
      row("formats.*.columns.comparison", T::text, "", "of a finished pair"),
      row("formats.*.constants", T::section, "", "what every row of the export has"),
      row("formats.*.constants.measurand", T::id, "", "when there is one only"),
      row("formats.*.constants.comparison", T::id, "", "of finished pairs"),
      row("formats.*.constants.item", T::text, "", "when everything is measured on one thing"),
      row("formats.*.constants.replicate", T::whole_number, "", "number of the repeated measurement")
          .within(0, 2'147'483'647),
      row("formats.*.constants.operator", T::text, "", "who measured"),
      row("formats.*.constants.note", T::text, "", "what to note with each"),
      row("formats.*.notes", T::text_list, "", "columns that are kept in the note"),
      row("formats.*.no_value", T::text_list, "", "texts that say that there is no result, as nothing does"),
      row("formats.*.skip_rows", T::section, "", "rows that are no results, such as means"),
      row("formats.*.skip_rows.column", T::text, "", "the column that tells them").required(),
      row("formats.*.skip_rows.matches", T::text, "", "pattern of its text").required(),
  };
}

Rows measurand_rows() {
  return {
      row("measurands", T::named, "", "the quantities measured").required(),
      row("measurands.*.title", T::text, "", "what people call it; else its id"),
      row("measurands.*.unit", T::text, "", "unit of results, levels and differences").required(),
      row("measurands.*.decimals", T::whole_number, "",
          "decimals of the results; else the smallest step seen")
          .within(0, 12),
      row("measurands.*.decision_levels", T::number_list, "",
          "values at which a decision is taken; none: no verdict"),
      row("measurands.*.allowable_difference", T::section, "",
          "does no harm, at each level the larger; none: no verdict"),
      row("measurands.*.allowable_difference.absolute", T::number, "", "in the unit").above(0, kAny),
      row("measurands.*.allowable_difference.percent", T::number, "", "of the level").above(0, 1'000),
      row("measurands.*.smallest_shift", T::number, "",
          "a smaller level alert is a notice; else allowable / 4, or 0.5 sd")
          .above(0, kAny),
  };
}

Rows standard_rows() {
  return {
      row("check_standards", T::named, "", "stable items measured again and again"),
      row("check_standards.*.title", T::text, "", "what people call it; else its id"),
      row("check_standards.*.lot", T::text, "1", "the lot in use, when there was only one"),
      row("check_standards.*.analyzers", T::id_list, "", "measured on these only; else on all"),
      row("check_standards.*.every", T::duration, "",
          "its cadence; else 8h for the alarm budget, never overdue")
          .within(kMinute, 366 * kDay),
      row("check_standards.*.measurands", T::named, "", "what is watched on it"),
      row("check_standards.*.measurands.*.reference", T::number, "",
          "its reference value; none: only stability is watched"),
      row("check_standards.*.measurands.*.expanded_uncertainty", T::number, "",
          "of the reference value, in the unit")
          .within(0, kAny),
      row("check_standards.*.measurands.*.coverage_factor", T::number, "2", "of the expanded uncertainty")
          .above(0, 10),
      row("check_standards.*.measurands.*.charts", T::section, "", "its own chart settings").as("charts"),
      row("check_standards.*.lots", T::list, "", "instead of lot, when lots follow each other; oldest first"),
      row("check_standards.*.lots[].lot", T::text, "", "its name").required(),
      row("check_standards.*.lots[].from", T::time, "", "in use from then on; the first may do without"),
      row("check_standards.*.lots[].measurands", T::named, "", "its own values; else the check standard's")
          .as("check_standards.*.measurands"),
      row("check_standards.*.charts", T::section, "", "this check standard's own chart settings")
          .as("charts"),
  };
}

Rows chart_rows() {
  return {
      row("charts", T::section, "", "how check readings are charted, for all check standards"),
      row("charts.method", T::word, "change_point", "how a change is looked for")
          .one_of("change_point|classical"),
      row("charts.baseline", T::whole_number, "30", "readings until learning ends; watched from the first")
          .within(10, 400),
      row("charts.split_memory", T::whole_number, "400", "newest readings that may be the start of a change")
          .within(30, 400),
      row("charts.clear_after", T::whole_number, "3", "readings after which a change may be over")
          .within(1, 100),
      row("charts.in_control_run_length", T::number, "",
          "readings between false signals of each score, instead of a share")
          .within(100, kLongRun),
      row("charts.center", T::number, "", "classical: centre line from an earlier study"),
      row("charts.sigma", T::number, "",
          "classical: standard deviation of one reading, from an earlier study")
          .above(0, kAny),
      row("charts.sigma_degrees_of_freedom", T::number, "", "classical: behind that sigma; none: exact")
          .within(1, 1e6),
      row("charts.run_spread", T::word, "standard_deviation", "classical: how replicates of a run scatter")
          .one_of("standard_deviation|range"),
      row("charts.ewma", T::section, "", "classical: exponentially weighted mean"),
      row("charts.ewma.weight", T::number, "", "weight of the newest reading").within(0.01, 1).required(),
      row("charts.ewma.width", T::number, "", "half width of its limits, in its own sd")
          .above(0, 10)
          .required(),
      row("charts.cusum", T::section, "", "classical: cumulative sum"),
      row("charts.cusum.allowance", T::number, "", "in sd").within(0, 10).required(),
      row("charts.cusum.limit", T::number, "", "in sd").above(0, 100).required(),
      row("charts.run_rules", T::list, "", "classical: run rules, any of these"),
      row("charts.run_rules[].same_side", T::whole_number, "", "so many in a row on one side").within(2, 100),
      row("charts.run_rules[].trend", T::whole_number, "", "so many in a row rising, or falling")
          .within(3, 100),
      row("charts.run_rules[].two_of_three_beyond", T::whole_number, "", "beyond so many sd on one side")
          .within(1, 3),
      row("charts.run_rules[].four_of_five_beyond", T::whole_number, "", "beyond so many sd on one side")
          .within(1, 3),
      row("charts.run_rules[].alternating", T::whole_number, "", "so many in a row up and down in turn")
          .within(4, 100),
      row("charts.run_rules[].near_centre", T::whole_number, "", "so many in a row within 1 sd")
          .within(4, 100),
      row("charts.run_rules[].away_from_centre", T::whole_number, "",
          "so many in a row beyond 1 sd, on both sides")
          .within(2, 100),
  };
}

Rows comparison_rows() {
  return {
      row("comparisons", T::named, "", "two analyzers whose results are used as one"),
      row("comparisons.*.title", T::text, "", "what people call it; else its id"),
      row("comparisons.*.measurand", T::id, "", "what is compared").required(),
      row("comparisons.*.x", T::id, "", "the reference side of y = intercept + slope * x").required(),
      row("comparisons.*.y", T::id, "", "the other side; a positive bias says that it reads high").required(),
      row("comparisons.*.window", T::section, "", "the pairs a verdict rests on"),
      row("comparisons.*.window.pairs", T::whole_number, "200", "at most so many, the newest")
          .within(3, 1'000),
      row("comparisons.*.window.age", T::duration_or_none, "90d",
          "none older than this, counted from the newest; or none")
          .within(kHour, 3'660 * kDay),
      row("comparisons.*.error_ratio", T::word_or_section, "from_check_standards",
          "var(x error) / var(y error), whence")
          .one_of("from_check_standards|from_replicates"),
      row("comparisons.*.error_ratio.sd_x", T::number, "", "repeatability of x, from an earlier study")
          .above(0, kAny),
      row("comparisons.*.error_ratio.sd_y", T::number, "", "repeatability of y").above(0, kAny),
      row("comparisons.*.error_ratio.lambda", T::number, "",
          "the ratio itself; taken as known to a factor of 2")
          .within(1e-6, 1e6),
      row("comparisons.*.error_model", T::word, "constant", "how the error goes with the level")
          .one_of("constant|proportional|mixed"),
      row("comparisons.*.fit", T::word, "deming", "the line's fit").one_of("deming|weighted_deming"),
      row("comparisons.*.relation", T::word_or_section, "",
          "the line that is to hold; the pair chart asks against it, else against the pairs' own")
          .one_of("identity"),
      row("comparisons.*.relation.intercept", T::number, "", "its intercept"),
      row("comparisons.*.relation.slope", T::number, "", "its slope").above(0, kAny),
      row("comparisons.*.confidence", T::number, "0.95", "of the intervals shown").within(0.5, 0.9999),
      row("comparisons.*.confirm", T::whole_number, "3", "pairs in a row before a verdict moves")
          .within(1, 100),
      row("comparisons.*.alert_confidence", T::number, "0.999",
          "of the interval that must lie wholly outside for an alert")
          .within(0.9, 0.999999),
      row("comparisons.*.least_pairs", T::whole_number, "20", "a verdict is gathering below this")
          .within(3, 1'000),
      row("comparisons.*.pair_within", T::duration, "24h", "results of one sample further apart are no pair")
          .within(kSecond, 366 * kDay),
      row("comparisons.*.every", T::duration, "", "its cadence; else 2h for the alarm budget, never overdue")
          .within(kSecond, 366 * kDay),
      row("comparisons.*.outliers", T::word, "set_aside",
          "a pair far off the line is set aside and told, or kept")
          .one_of("set_aside|keep"),
      row("comparisons.*.prove_within", T::duration, "", "inconclusive for longer is told")
          .within(kHour, 3'660 * kDay),
      row("comparisons.*.split_memory", T::whole_number, "400",
          "newest pairs that may be the start of a change")
          .within(30, 400),
      row("comparisons.*.in_control_run_length", T::number, "",
          "pairs between false warnings of the pair chart, instead of a share")
          .within(100, kLongRun),
  };
}

Rows alert_rows() {
  return {
      row("alerts", T::section, "", "who is told, and how often"),
      row("alerts.remind_every", T::duration, "8h", "an open alert that nobody acknowledged is sent again")
          .within(kMinute, 366 * kDay),
      row("alerts.reopen_within", T::duration, "24h", "back within this, it is the same alert again")
          .within(0, 366 * kDay),
      row("alerts.hold", T::duration, "1h", "an intervention holds notifications of its analyzer this long")
          .within(0, 30 * kDay),
      row("alerts.overdue_after", T::number, "1.5", "times its cadence without anything, and it is overdue")
          .within(1, 100),
      row("alerts.quiet", T::list, "", "hours in which nothing is expected, so nothing is overdue"),
      row("alerts.quiet[].days", T::word_list, "", "else every day").one_of("mon|tue|wed|thu|fri|sat|sun"),
      row("alerts.quiet[].from", T::day_time, "00:00", "in UTC"),
      row("alerts.quiet[].to", T::day_time, "24:00", "earlier than from: on the next day"),
      row("alerts.maintenance", T::list, "", "planned work; notifications are held, findings recorded"),
      row("alerts.maintenance[].analyzer", T::id, "", "whose").required(),
      row("alerts.maintenance[].from", T::time, "", "its start").required(),
      row("alerts.maintenance[].to", T::time, "", "its end").required(),
      row("alerts.routes", T::list, "", "the endpoints of the signed webhooks; none: nothing is sent"),
      row("alerts.routes[].name", T::id, "", "names the route in commands and messages").required(),
      row("alerts.routes[].url", T::url, "", "where it is posted").required(),
      row("alerts.routes[].secret_file", T::path, "",
          "file with the signing secret; two lines = new and old"),
      row("alerts.routes[].secret_env", T::variable, "", "or the environment variable that holds it"),
      row("alerts.routes[].unsigned", T::flag, "false", "true sends without a signature"),
      row("alerts.routes[].ca_file", T::path, "", "own certificate authority, PEM; else the system's"),
      row("alerts.routes[].kinds", T::word_list, "", "only these alert kinds; else all").one_of(kAlertKinds),
      row("alerts.routes[].at_least", T::word, "notice", "only from this severity up")
          .one_of("notice|warning|critical"),
      row("alerts.routes[].analyzers", T::id_list, "", "only alerts of these; else all"),
      row("alerts.routes[].measurands", T::id_list, "", "only alerts of these; else all"),
      row("alerts.routes[].comparisons", T::id_list, "", "only alerts of these; else all"),
      row("alerts.routes[].heartbeat", T::duration, "",
          "a sign of life this often, so that silence is noticed")
          .within(kMinute, 30 * kDay),
      row("alerts.routes[].unacknowledged_for", T::duration, "", "only what nobody acknowledged by then")
          .within(kMinute, 30 * kDay),
      row("access", T::section, "", "who may read and write over HTTP"),
      row("access.tokens_file", T::path, "",
          "hashes of the tokens, written by agreed token; none: every POST is 401"),
  };
}

}  // namespace

const std::vector<SettingRow>& schema() {
  static const Rows all = [] {
    Rows rows;
    for (const Rows& part : {service_rows(), analyzer_rows(), format_rows(), mapping_rows(), measurand_rows(),
                             standard_rows(), chart_rows(), comparison_rows(), alert_rows()})
      rows.insert(rows.end(), part.begin(), part.end());
    return rows;
  }();
  return all;
}

}  // namespace agreed::settings_file
