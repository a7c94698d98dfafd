// Every fault of a configuration is told at its place, by its key, with what was expected, and by one
// message.
#include <algorithm>
#include <string>
#include <vector>

#include <doctest/doctest.h>

#include "config/config.hpp"

using namespace agreed;

namespace {

const std::string kGood =
    "site: Harrow Mill\n"                                                                              // 1
    "listen: {address: 127.0.0.1, port: 7480}\n"                                                       // 2
    "analyzers:\n"                                                                                     // 3
    "  line1: {inbox: drop/line1}\n"                                                                   // 4
    "  line2: {inbox: drop/line2, zone: Europe/Dublin, settle: 2s}\n"                                  // 5
    "measurands:\n"                                                                                    // 6
    "  protein:\n"                                                                                     // 7
    "    unit: g/100 g\n"                                                                              // 8
    "    decimals: 2\n"                                                                                // 9
    "    decision_levels: [10.5, 13.0]\n"                                                              // 10
    "    allowable_difference: {absolute: 0.2}\n"                                                      // 11
    "check_standards:\n"                                                                               // 12
    "  wheat-low:\n"                                                                                   // 13
    "    every: 8h\n"                                                                                  // 14
    "    analyzers: [line1, line2]\n"                                                                  // 15
    "    measurands: {protein: {reference: 10.62, expanded_uncertainty: 0.08}}\n"                      // 16
    "charts: {baseline: 30}\n"                                                                         // 17
    "comparisons:\n"                                                                                   // 18
    "  protein:\n"                                                                                     // 19
    "    measurand: protein\n"                                                                         // 20
    "    x: line1\n"                                                                                   // 21
    "    y: line2\n"                                                                                   // 22
    "    window: {pairs: 200}\n"                                                                       // 23
    "    confidence: 0.95\n"                                                                           // 24
    "    confirm: 3\n"                                                                                 // 25
    "    least_pairs: 20\n"                                                                            // 26
    "    every: 2h\n"                                                                                  // 27
    "alerts:\n"                                                                                        // 28
    "  routes:\n"                                                                                      // 29
    "    - {name: shift, url: \"http://127.0.0.1:9099/agreed\", unsigned: true, at_least: notice}\n";  // 30

std::string with(const std::string& find, const std::string& replacement) {
  std::string text = kGood;
  const std::size_t at = text.find(find);
  REQUIRE_MESSAGE(at != std::string::npos, find);
  return text.replace(at, find.size(), replacement);
}

struct Fault {
  const char* name;
  std::string text;
  int line, column;
  const char* key;
  const char* message;     // a part of it
  std::size_t errors = 1;  // with those that necessarily follow: what refers to a thing that is not there
};

std::vector<Fault> structural_faults() {
  return {
      {"a mistyped key", with("    confirm:", "    confrim:"), 25, 5, "comparisons.protein.confrim",
       "unknown key; did you mean confirm?"},
      {"a mistyped key at the top", with("charts:", "chart:"), 17, 1, "chart", "did you mean charts?"},
      {"a key at the wrong place", with("    least_pairs: 20", "    decision_levels: [1]"), 26, 5,
       "comparisons.protein.decision_levels", "it belongs under measurands.*"},
      {"a key nobody knows", with("{baseline: 30}", "{wavelength: 30}"), 17, 10, "charts.wavelength",
       "known here: method, baseline"},
      {"a key given twice", with("    confirm: 3\n", "    confirm: 3\n    x: line2\n"), 26, 5,
       "comparisons.protein.x", "given twice, first in line 21"},
      {"an analyzer given twice", with("  line2: {inbox", "  line1: {inbox"), 5, 3, "analyzers.line1",
       "given twice, first in line 4", 3},
      {"an anchor", with("unit: g/100 g", "unit: &u g/100 g"), 8, 11, "measurands.protein.unit",
       "anchors are not read"},
      {"a tag", with("unit: g/100 g", "unit: !!str g/100 g"), 8, 11, "measurands.protein.unit",
       "tags are not read"},
      {"a missing required key", with("    unit: g/100 g\n", ""), 7, 3, "measurands.protein.unit",
       "missing; expected a text"},
      {"a missing inbox", with("line1: {inbox: drop/line1}", "line1: {title: L1}"), 4, 3,
       "analyzers.line1.inbox", "missing; expected a path"},
      {"no site", with("site: Harrow Mill\n", ""), 1, 1, "site", "missing"},
      {"no value", with("every: 8h", "every:"), 14, 5, "check_standards.wheat-low.every",
       "found no value, expected a duration"},
      {"a whole file expected of one that grows",
       with("line1: {inbox: drop/line1}",
            "line1: {inbox: drop/line1, mode: growing, on_bad_row: reject_file}"),
       4, 57, "analyzers.line1.on_bad_row", "a file that grows is never there as a whole"},
      {"a list for a section", with("{baseline: 30}", "[baseline]"), 17, 9, "charts",
       "found a list, expected a section"},
      {"a text for a list", with("[line1, line2]", "line1"), 15, 16, "check_standards.wheat-low.analyzers",
       "found 'line1', expected a list of ids such as [line1, line2]"},
      {"a section for a text", with("site: Harrow Mill", "site: {name: x}"), 1, 7, "site",
       "found a section, expected a text"},
      {"a wrong id", with("  line1: {inbox", "  line 1: {inbox"), 4, 3, "analyzers.'line 1'",
       "expected an id: letters, digits, _ and -", 3},
      {"a quotation mark left open", with("site: Harrow Mill", "site: \"Harrow Mill"), 1, 7, "site",
       "a quotation mark that is not closed in its line"},
      {"a tab as indentation", with("    unit:", "\tunit:"), 8, 2, "",
       "the line is indented by a tab, expected spaces"},
      {"a second document", kGood + "---\nsite: x\n", 0, 0, "", "found a second document"},
  };
}

std::vector<Fault> value_faults() {
  return {
      {"an octal-looking number", with("decimals: 2", "decimals: 02"), 9, 15, "measurands.protein.decimals",
       "found '02', expected a whole number from 0 to 12; write it without zeros in front"},
      {"a number out of range", with("decimals: 2", "decimals: 13"), 9, 15, "measurands.protein.decimals",
       "found '13', expected a whole number from 0 to 12"},
      {"a decimal comma", with("absolute: 0.2", "absolute: \"0,2\""), 11, 38,
       "measurands.protein.allowable_difference.absolute", "the decimal sign is a point"},
      {"infinity", with("absolute: 0.2", "absolute: .inf"), 11, 38,
       "measurands.protein.allowable_difference.absolute", "found '.inf', expected a number above 0"},
      {"not a number", with("reference: 10.62", "reference: .nan"), 16, 39,
       "check_standards.wheat-low.measurands.protein.reference", "found '.nan', expected a number"},
      {"nothing allowed", with("absolute: 0.2", "absolute: 0"), 11, 38,
       "measurands.protein.allowable_difference.absolute", "expected a number above 0"},
      {"neither absolute nor percent", with("{absolute: 0.2}", "{}"), 11, 5,
       "measurands.protein.allowable_difference", "found neither absolute nor percent"},
      {"a percentage of a level of nothing",
       with("[10.5, 13.0]\n    allowable_difference: {absolute: 0.2}",
            "[0, 13.0]\n    allowable_difference: {percent: 1.5}"),
       11, 27, "measurands.protein.allowable_difference", "allows nothing at the decision level 0"},
      {"a level that is no number", with("[10.5, 13.0]", "[10.5, high]"), 10, 29,
       "measurands.protein.decision_levels[1]", "found 'high', expected a number"},
      {"a level given twice", with("[10.5, 13.0]", "[13, 13.0]"), 10, 27,
       "measurands.protein.decision_levels[1]", "found '13.0' twice"},
      {"a duration without unit", with("every: 8h", "every: 8"), 14, 12, "check_standards.wheat-low.every",
       "found '8', expected a duration such as 30s, 15min, 8h or 30d, from 1min to 366d; the unit is "
       "missing"},
      {"a duration with a wrong unit", with("every: 8h", "every: 8 hours"), 14, 12,
       "check_standards.wheat-low.every", "found '8 hours', expected a duration"},
      {"a duration out of range", with("settle: 2s", "settle: 2h"), 5, 59, "analyzers.line2.settle",
       "found '2h', expected a duration such as 30s, 15min, 8h or 30d, from 0s to 1h"},
      {"yes for true", with("unsigned: true", "unsigned: yes"), 30, 68, "alerts.routes[0].unsigned",
       "found 'yes', expected true or false"},
      {"a mistyped word", with("at_least: notice", "at_least: notise"), 30, 84, "alerts.routes[0].at_least",
       "expected one of notice, warning, critical; did you mean notice?"},
      {"an unknown time zone", with("Europe/Dublin", "Europe/Dubln"), 5, 36, "analyzers.line2.zone",
       "found 'Europe/Dubln', expected a time zone such as Europe/Dublin; did you mean Europe/Dublin?"},
      {"a table of the time zone database", with("Europe/Dublin", "zone.tab"), 5, 36, "analyzers.line2.zone",
       "expected a time zone"},
      {"a way out of the time zone database", with("Europe/Dublin", "../../../etc/passwd"), 5, 36,
       "analyzers.line2.zone", "expected a time zone"},
      {"a port too large", with("port: 7480", "port: 74800"), 2, 36, "listen.port",
       "expected a whole number from 0 to 65535"},
      {"an address that is none", with("127.0.0.1, port", "everywhere, port"), 2, 19, "listen.address",
       "expected an address such as 127.0.0.1 or ::1"},
      {"a window too large", with("pairs: 200", "pairs: 1001"), 23, 21, "comparisons.protein.window.pairs",
       "expected a whole number from 3 to 1000"},
      {"a window too small", with("pairs: 200", "pairs: 2"), 23, 21, "comparisons.protein.window.pairs",
       "expected a whole number from 3 to 1000"},
      {"no confirmation", with("confirm: 3", "confirm: 0"), 25, 14, "comparisons.protein.confirm",
       "expected a whole number from 1"},
      {"a text over 200 bytes", with("unit: g/100 g", "unit: " + std::string(201, 'g')), 8, 11,
       "measurands.protein.unit", "is a quotation mark left open?"},
      {"a URL that is none", with("http://127.0.0.1:9099/agreed", "chat.harrow.example"), 30, 26,
       "alerts.routes[0].url", "expected a URL such as https://"},
  };
}

std::vector<Fault> faults_between_keys() {
  const std::string route = "unsigned: true, at_least: notice";
  return {
      {"an unknown analyzer", with("y: line2", "y: line3"), 22, 8, "comparisons.protein.y",
       "found 'line3', expected one of line1, line2; did you mean line1?"},
      {"an unknown measurand", with("    measurand: protein", "    measurand: protien"), 20, 16,
       "comparisons.protein.measurand", "did you mean protein?"},
      {"an unknown measurand of a standard", with("{protein: {reference", "{protien: {reference"), 16, 18,
       "check_standards.wheat-low.measurands.protien", "did you mean protein?"},
      {"an unknown analyzer of a standard", with("[line1, line2]", "[line1, lin2]"), 15, 24,
       "check_standards.wheat-low.analyzers[1]", "did you mean line2?"},
      {"one analyzer on both sides", with("y: line2", "y: line1"), 22, 8, "comparisons.protein.y",
       "found the analyzer of x again"},
      {"two analyzers with one inbox", with("drop/line2,", "./drop/line1/,"), 5, 18, "analyzers.line2.inbox",
       "found the inbox of analyzer line1 again"},
      {"a verdict from more pairs than fit", with("least_pairs: 20", "least_pairs: 201"), 26, 18,
       "comparisons.protein.least_pairs", "found 201, expected at most window.pairs, which is 200"},
      {"alerts surer than shown", with("confidence: 0.95", "confidence: 0.9995"), 24, 17,
       "comparisons.protein.confidence", "expected alert_confidence above confidence"},
      {"an uncertainty of nothing", with("reference: 10.62, ", ""), 16, 50,
       "check_standards.wheat-low.measurands.protein.expanded_uncertainty", "found without reference"},
      {"both lot and lots", with("    every: 8h\n", "    every: 8h\n    lot: A\n    lots: [{lot: B}]\n"), 15,
       10, "check_standards.wheat-low.lot", "found beside lots, expected one of the two"},
      {"lots in the wrong order",
       with("    every: 8h\n",
            "    lots: [{lot: A, from: 2026-03-01}, {lot: B, from: \"2026-02-01T00:00:00Z\"}]\n"),
       14, 55, "check_standards.wheat-low.lots[1].from", "expected a time after the lot before it"},
      {"a later lot without a date", with("    every: 8h\n", "    lots: [{lot: A}, {lot: B}]\n"), 14, 22,
       "check_standards.wheat-low.lots[1].from", "missing"},
      {"a check standard of nothing",
       with("    measurands: {protein: {reference: 10.62, expanded_uncertainty: 0.08}}\n", ""), 13, 3,
       "check_standards.wheat-low.measurands", "missing; expected at least one measurand"},
      {"half an error ratio", with("every: 2h", "error_ratio: {sd_x: 0.02}"), 27, 5,
       "comparisons.protein.error_ratio", "expected either both sd_x and sd_y or lambda alone"},
      {"open to others without a token", with("127.0.0.1, port", "0.0.0.0, port"), 2, 19, "listen.address",
       "expected access.tokens_file, or open_to_network: true"},
      {"behind a proxy without a token", with("127.0.0.1, port", "127.0.0.1, behind_proxy: true, port"), 2,
       44, "listen.behind_proxy", "expected access.tokens_file, or open_to_network: true"},
      {"no secret and no word of it", with(route, "at_least: notice"), 30, 7, "alerts.routes[0]",
       "found no signing secret, expected secret_file or secret_env, or unsigned: true"},
      {"unsigned, with a secret", with(route, "unsigned: true, secret_env: PATH"), 30, 7, "alerts.routes[0]",
       "expected one of them"},
      {"a route's unknown kind", with(route, "unsigned: true, kinds: [agreement_lst]"), 30, 82,
       "alerts.routes[0].kinds[0]", "did you mean agreement_lost?"},
      {"a route of an unknown analyzer", with(route, "unsigned: true, analyzers: [line3]"), 30, 86,
       "alerts.routes[0].analyzers[0]", "expected one of line1, line2"},
      {"a route for nothing", with(route, "unsigned: true, kinds: []"), 30, 81, "alerts.routes[0].kinds",
       "found an empty list"},
      {"two routes of one name",
       kGood + "    - {name: shift, url: \"https://harrow.example/a\", unsigned: true}\n", 31, 14,
       "alerts.routes[1].name", "found 'shift' twice"},
      {"a budget used up by own run lengths", with("baseline: 30", "in_control_run_length: 300"), 1, 1,
       "false_alerts_per_year", "own in_control_run_length settings use up 14.6 a year"},
      {"a budget beyond sense", "false_alerts_per_year: 1000\n" + kGood, 1, 24, "false_alerts_per_year",
       "expected at least 20", 2},
      {"a weighted fit beside a constant error",
       with("every: 2h", "fit: weighted_deming\n    error_model: constant"), 28, 18,
       "comparisons.protein.error_model",
       "found 'constant' beside fit: weighted_deming, expected proportional"},
      {"sds that hold at one level",
       with("every: 2h", "error_model: proportional\n    error_ratio: {sd_x: 0.02, sd_y: 0.02}"), 27, 18,
       "comparisons.protein.error_model", "expected error_ratio: {lambda: ...}"},
      {"sds beside the weighted fit",
       with("every: 2h", "fit: weighted_deming\n    error_ratio: {sd_x: 0.02, sd_y: 0.02}"), 27, 10,
       "comparisons.protein.fit", "expected error_ratio: {lambda: ...}"},
      {"a mixed error from replicates",
       with("every: 2h", "error_model: mixed\n    error_ratio: from_replicates"), 27, 18,
       "comparisons.protein.error_model", "only check standards at two levels tell both parts"},
      {"a window longer than the time between false alerts", with("every: 2h", "every: 5d"), 23, 13,
       "comparisons.protein.window", "expected fewer than the 146 pairs"},
  };
}

std::vector<Fault> faults_of_formats() {
  return {
      {"a format nobody knows",
       with("line1: {inbox: drop/line1}", "line1: {inbox: drop/line1, format: plian}"), 4, 38,
       "analyzers.line1.format", "found 'plian', expected one of plain; did you mean plain?"},
  };
}

void check_each(const std::vector<Fault>& faults) {
  for (const Fault& fault : faults) {
    INFO(fault.name);
    const ConfigResult result = parse_config(fault.text, "/nowhere/agreed.yaml");
    CHECK_FALSE(result.config.has_value());
    std::vector<ConfigProblem> errors;
    std::copy_if(result.problems.begin(), result.problems.end(), std::back_inserter(errors),
                 [](const ConfigProblem& p) { return !p.warning; });
    std::string all;
    for (const ConfigProblem& problem : errors) all += to_string(problem, "f") + '\n';
    INFO(all);
    REQUIRE_FALSE(errors.empty());
    CHECK(errors.size() == fault.errors);
    CHECK(errors[0].line == fault.line);
    CHECK(errors[0].column == fault.column);
    CHECK(errors[0].key == fault.key);
    CHECK(errors[0].message.find(fault.message) != std::string::npos);
  }
}

}  // namespace

TEST_CASE("the configuration that the faults are put into is good") {
  const ConfigResult result = parse_config(kGood, "/nowhere/agreed.yaml");
  CHECK(result.config.has_value());
  CHECK(result.problems.empty());
}

TEST_CASE("an established relation is a word or a whole line") {
  const ConfigResult word = parse_config(with("every: 2h", "relation: identity"), "agreed.yaml");
  REQUIRE(word.config);
  CHECK(word.config->settings->comparisons[0].relation == EstablishedLine{0, 1});
  const ConfigResult line =
      parse_config(with("every: 2h", "relation: {intercept: -0.1, slope: 1.02}"), "agreed.yaml");
  REQUIRE(line.config);
  CHECK(line.config->settings->comparisons[0].relation == EstablishedLine{-0.1, 1.02});
  CHECK_FALSE(parse_config(kGood, "agreed.yaml").config->settings->comparisons[0].relation);
  for (const char* bad : {"relation: {slope: 1.02}", "relation: {intercept: 0}",
                          "relation: {intercept: 0, slope: 0}", "relation: one_to_one", "relation: {}"}) {
    INFO(bad);
    CHECK_FALSE(parse_config(with("every: 2h", bad), "agreed.yaml").config);
  }
}

TEST_CASE("faults of structure are told at their place") {
  check_each(structural_faults());
}
TEST_CASE("faults of values are told at their place") {
  check_each(value_faults());
}
TEST_CASE("faults between keys are told at their place") {
  check_each(faults_between_keys());
}
TEST_CASE("a format that is not there is told with the nearest") {
  check_each(faults_of_formats());
}
TEST_CASE("faults of a format are told at their key") {
  const std::string format =
      "formats:\n"
      "  mill:\n"
      "    delimiter: \";\"\n"
      "    time: {column: Datum, pattern: \"%d.%m.%Y %H:%M:%S\"}\n"
      "    item: {column: Probe}\n"
      "    kind: {check_when_item_matches: \"^CS-\"}\n"
      "    values: {protein: \"Prot %\"}\n";
  REQUIRE(parse_config(kGood + format, "/nowhere/agreed.yaml").config);
  struct FormatFault {
    const char *find, *replacement, *key, *message;
  };
  const std::vector<FormatFault> faults = {
      {"delimiter: \";\"", "delimiter: ab", "formats.mill.delimiter", "one character"},
      {"delimiter: \";\"", "decimal: x", "formats.mill.decimal", "expected"},
      {"delimiter: \";\"", "decimal: \",\"\n    thousands: \",\"", "formats.mill.thousands",
       "which is the decimal sign"},
      {"delimiter: \";\"", "type: json\n    mode: growing", "formats.mill.mode", "cannot be appended to"},
      {"delimiter: \";\"", "header: false", "formats.mill.time.column", "the file has no header"},
      {"delimiter: \";\"", "encoding: latin-77", "formats.mill.encoding", "expected"},
      {"delimiter: \";\"", "delimitter: \";\"", "formats.mill.delimitter", "delimiter"},
      {"column: Datum, ", "", "formats.mill.time", "found no column"},
      {"column: Datum, ", "columns: [Datum], ", "formats.mill.time.columns", "expected two"},
      {"%d.%m.%Y", "%d.%q.%Y", "formats.mill.time.pattern", "expected a pattern"},
      {"    item: {column: Probe}\n", "", "formats.mill", "found no item"},
      {"\"^CS-\"", "\"^CS-(\"", "formats.mill.kind.check_when_item_matches", "expected a pattern"},
      {"protein: \"Prot %\"", "protien: \"Prot %\"", "formats.mill.values.protien", "protein"},
      {"    values: {protein: \"Prot %\"}\n", "", "formats.mill", "found no results"},
      {"    values: {protein: \"Prot %\"}\n", "    value: {column: V}\n", "formats.mill",
       "without its measurand"},
      {"    values:", "    x: X\n    values:", "formats.mill", "the one or the other"},
  };
  for (const FormatFault& fault : faults) {
    std::string text = format;
    const std::size_t at = text.find(fault.find);
    REQUIRE_MESSAGE(at != std::string::npos, fault.find);
    text.replace(at, std::string(fault.find).size(), fault.replacement);
    const ConfigResult result = parse_config(kGood + text, "/nowhere/agreed.yaml");
    INFO(text);
    CHECK_FALSE(result.config.has_value());
    const bool told =
        std::any_of(result.problems.begin(), result.problems.end(), [&](const ConfigProblem& p) {
          return !p.warning && p.line > 30 && p.key == fault.key &&
                 p.message.find(fault.message) != std::string::npos;
        });
    std::string all;
    for (const ConfigProblem& problem : result.problems) all += to_string(problem, "f") + '\n';
    CHECK_MESSAGE(told, fault.key << ": " << all);
  }
}

TEST_CASE("all faults are told at once, in the order of the file") {
  std::string text = with("decimals: 2", "decimals: two");
  text.replace(text.find("confirm: 3"), 10, "confrim: 3");
  text.replace(text.find("y: line2"), 8, "y: line9");
  text.replace(text.find("port: 7480"), 10, "port: -1");
  const ConfigResult result = parse_config(text, "agreed.yaml");
  std::vector<std::string> told;
  for (const auto& problem : result.problems) told.push_back(to_string(problem, "agreed.yaml"));
  REQUIRE(told.size() == 4);
  CHECK(told[0] == "agreed.yaml:2:36: listen.port: found '-1', expected a whole number from 0 to 65535");
  CHECK(told[1] ==
        "agreed.yaml:9:15: measurands.protein.decimals: found 'two', expected a whole number from 0 to 12");
  CHECK(told[2] ==
        "agreed.yaml:22:8: comparisons.protein.y: found 'line9', expected one of line1, line2; did you "
        "mean line1?");
  CHECK(told[3] == "agreed.yaml:25:5: comparisons.protein.confrim: unknown key; did you mean confirm?");
}

TEST_CASE("what is doubtful is a warning and the configuration counts") {
  struct Doubt {
    const char* name;
    std::string text;
    int line, column;
    const char* key;
    const char* message;
  };
  const std::string url = "http://127.0.0.1:9099/agreed";
  const std::vector<Doubt> doubts = {
      {"alerts in the clear", with(url, "http://chat.harrow.example/a1"), 30, 26, "alerts.routes[0].url",
       "expected https://"},
      {"no levels", with("    decision_levels: [10.5, 13.0]\n", ""), 19, 16, "comparisons.protein.measurand",
       "the verdict will stay gathering"},
      {"no check standard on one side", with("[line1, line2]", "[line1]"), 19, 3,
       "comparisons.protein.error_ratio", "no check standard gives protein on line2"},
      {"a short own run length", with("every: 2h", "in_control_run_length: 999"), 27, 28,
       "comparisons.protein.in_control_run_length", "answered by hand"},
      {"a short share", with("every: 8h", "every: 1d"), 1, 1, "false_alerts_per_year",
       "by which chart line1/wheat-low/protein has a false alert every 365 readings: false alerts would have "
       "to be "
       "answered by hand; at least 1000 takes false_alerts_per_year: 2.19"},
  };
  for (const Doubt& doubt : doubts) {
    INFO(doubt.name);
    // A comparison's own short run length leaves too little for the charts unless the budget is larger.
    const bool short_own = std::string(doubt.key).find("comparisons.protein.in_control") == 0;
    const std::string text = short_own ? doubt.text + "false_alerts_per_year: 12\n" : doubt.text;
    const ConfigResult result = parse_config(text, "/nowhere/agreed.yaml");
    CHECK(result.config.has_value());
    std::string all;
    for (const ConfigProblem& problem : result.problems) all += to_string(problem, "f") + '\n';
    INFO(all);
    const bool told =
        std::any_of(result.problems.begin(), result.problems.end(), [&](const ConfigProblem& p) {
          return p.warning && p.line == doubt.line && p.column == doubt.column && p.key == doubt.key &&
                 p.message.find(doubt.message) != std::string::npos;
        });
    CHECK(told);
  }
}

TEST_CASE("following the advice about a short share gives run lengths of 1,000") {
  const std::string text = with("every: 8h", "every: 1d") + "false_alerts_per_year: 2.19\n";
  const ConfigResult result = parse_config(text, "/nowhere/agreed.yaml");
  REQUIRE(result.config.has_value());
  CHECK(result.problems.empty());
  CHECK(result.config->settings->charts[0].level_run_length >= 1000);
}
