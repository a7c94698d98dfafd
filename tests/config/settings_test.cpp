// What a good configuration becomes.
#include <map>
#include <string>

#include <doctest/doctest.h>

#include "config/config.hpp"
#include "core/base/rfc3339.hpp"

using namespace agreed;
using doctest::Approx;
using namespace std::chrono_literals;

namespace {

Config parsed(const std::string& text) {
  ConfigResult result = parse_config(text, "/etc/agreed/agreed.yaml");
  std::string told;
  for (const ConfigProblem& problem : result.problems) told += to_string(problem, "f") + '\n';
  REQUIRE_MESSAGE(result.config.has_value(), told);
  return *result.config;
}

const std::string kMill =
    "site: Harrow Mill\n"
    "analyzers:\n"
    "  line2: {inbox: ../drop/line2/, title: Second}\n"
    "  line1: {inbox: /srv/drop/line1}\n"
    "measurands:\n"
    "  protein: {unit: g/100 g, decision_levels: [10.5, 13.0], allowable_difference: {absolute: 0.2, "
    "percent: 1.5}}\n"
    "  moisture: {unit: g/100 g, smallest_shift: 0.05}\n"
    "check_standards:\n"
    "  wheat-low: {every: 8h, measurands: {protein: {reference: 10.62, expanded_uncertainty: 0.08}, "
    "moisture: {}}}\n"
    "  wheat-high:\n"
    "    analyzers: [line2]\n"
    "    lots:\n"
    "      - {lot: 2025-C, measurands: {protein: {reference: 13.31}}}\n"
    "      - {lot: 2026-A, from: \"2026-01-05T06:00:00Z\"}\n"
    "    measurands: {protein: {reference: 13.24, coverage_factor: 3}}\n"
    "    charts: {baseline: 40, in_control_run_length: 7300}\n"
    "charts: {clear_after: 4}\n"
    "comparisons:\n"
    "  protein: {measurand: protein, x: line1, y: line2, window: {pairs: 100, age: none}}\n";

}  // namespace

TEST_CASE("lists are sorted by id and charts by analyzer, standard, measurand") {
  const Config config = parsed(kMill);
  const Settings& settings = *config.settings;
  CHECK(settings.analyzers[0].id == "line1");
  CHECK(settings.analyzers[0].title == "line1");
  CHECK(settings.analyzers[1].title == "Second");
  CHECK(config.intake[0].analyzer == "line1");
  CHECK(config.intake[1].analyzer == "line2");
  CHECK(settings.measurands[0].id == "moisture");
  CHECK(settings.standards[0].id == "wheat-high");
  std::string order;
  for (const ChartSettings& chart : settings.charts)
    order += settings.of(chart.analyzer).id + '/' + settings.of(chart.standard).id + '/' +
             settings.of(chart.measurand).id + '\n';
  CHECK(order ==
        "line1/wheat-low/moisture\nline1/wheat-low/protein\n"
        "line2/wheat-high/protein\nline2/wheat-low/moisture\nline2/wheat-low/protein\n");
}

TEST_CASE("paths are taken relative to the file and made clean") {
  const Config config = parsed(kMill + "state: ./journal/\naccess: {tokens_file: tokens}\n");
  CHECK(config.file == "/etc/agreed/agreed.yaml");
  CHECK(config.intake[0].inbox == "/srv/drop/line1");
  CHECK(config.intake[1].inbox == "/etc/drop/line2");
  CHECK(config.state == "/etc/agreed/journal");
  CHECK(config.tokens_file.value() == "/etc/agreed/tokens");
}

TEST_CASE("a check standard's own chart settings win over those for all") {
  const Settings settings = *parsed(kMill).settings;
  const ChartSettings& general = settings.charts[0];
  const ChartSettings& own = settings.charts[2];
  CHECK(general.baseline == 30);
  CHECK(general.clear_after == 4);
  CHECK(own.baseline == 40);
  CHECK(own.clear_after == 4);
  CHECK(own.level_run_length == Approx(7300));
  REQUIRE(own.own_run_length);
  CHECK(*own.own_run_length == Approx(7300));
  CHECK_FALSE(general.own_run_length);
  CHECK(general.smallest_shift.value() == Approx(0.05));
  CHECK_FALSE(own.smallest_shift.has_value());
}

TEST_CASE("lots follow each other, each with its own reference value or the standard's") {
  const Settings settings = *parsed(kMill).settings;
  const auto& lots = settings.charts[2].lots;
  REQUIRE(lots.size() == 2);
  CHECK(lots[0].id == "2025-C");
  CHECK_FALSE(lots[0].from.has_value());
  CHECK(lots[0].reference->value == Approx(13.31));
  CHECK(lots[0].reference->coverage_factor == Approx(2));
  CHECK(to_rfc3339(lots[1].from.value()) == "2026-01-05T06:00:00.000Z");
  CHECK(lots[1].reference->value == Approx(13.24));
  CHECK(lots[1].reference->coverage_factor == Approx(3));
  CHECK(settings.charts[0].lots.size() == 1);
  CHECK_FALSE(settings.charts[0].lots[0].reference.has_value());
  CHECK(settings.charts[1].lots[0].reference->expanded_uncertainty.value() == Approx(0.08));
}

TEST_CASE("files are written once unless the analyzer or its format says that they grow") {
  const auto modes = [](const std::string& first, const std::string& second) {
    std::string text = kMill;
    text.replace(text.find("title: Second"), 13, second);
    text.replace(text.find("/srv/drop/line1"), 15, "/srv/drop/line1" + first);
    text += "formats:\n  mill: {mode: growing, time: {column: t}, item: {column: i}, values: {protein: p}}\n";
    const Config config = parsed(text);
    return std::pair(config.intake[0].mode, config.intake[1].mode);
  };
  using enum FileMode;
  CHECK(modes("", "title: Second") == std::pair(whole, whole));
  CHECK(modes(", mode: growing", "format: mill") == std::pair(growing, growing));
  CHECK(modes(", format: mill, mode: whole", "mode: whole") == std::pair(whole, whole));
}

TEST_CASE("a cadence that is not given serves the budget and calls nothing overdue") {
  const Settings settings = *parsed(kMill).settings;
  CHECK(settings.charts[0].overdue);
  CHECK(settings.charts[0].every == Duration(8h));
  CHECK_FALSE(settings.charts[2].overdue);
  CHECK(settings.charts[2].every == Duration(8h));
  CHECK_FALSE(settings.comparisons[0].overdue);
  CHECK(settings.comparisons[0].every == Duration(2h));
}

TEST_CASE("run lengths follow from the shares that own ones leave") {
  // wheat-high on line2 uses 2 * 1,095 / 7,300 = 0.3 a year; 5.7 are left for 4 charts and 1 comparison.
  const Settings settings = *parsed(kMill).settings;
  CHECK(settings.charts[0].level_run_length == Approx(1095 / (5.7 / 5 / 2)).epsilon(1e-12));
  CHECK(settings.charts[0].precision_run_length == Approx(1095 / (5.7 / 5 / 2)).epsilon(1e-12));
  CHECK(settings.comparisons[0].warning_run_length == Approx(4380 / (5.7 / 5 / 2)).epsilon(1e-12));
  CHECK(settings.comparisons[0].outlier_run_length == Approx(4380 / (5.7 / 5 / 4)).epsilon(1e-12));
  CHECK(settings.comparisons[0].scatter_run_length == Approx(4380 / (5.7 / 5 / 4)).epsilon(1e-12));
  CHECK(settings.alarm_budget.expected_per_year == Approx(6).epsilon(1e-12));
  CHECK_FALSE(settings.comparisons[0].own_run_length);
  std::string text = kMill;
  const std::string comparison = "y: line2";
  text.replace(text.find(comparison), comparison.size(), comparison + ", in_control_run_length: 9000");
  const Settings with_own = *parsed(text).settings;
  REQUIRE(with_own.comparisons[0].own_run_length);
  CHECK(*with_own.comparisons[0].own_run_length == Approx(9000));
  CHECK(with_own.comparisons[0].warning_run_length == Approx(9000));
}

TEST_CASE("windows: 90 days also when only pairs is given, none when none is asked for") {
  CHECK_FALSE(parsed(kMill).settings->comparisons[0].window_age.has_value());
  std::string text = kMill;
  text.replace(text.find(", age: none"), 11, "");
  CHECK(parsed(text).settings->comparisons[0].window_age == Duration(90 * 24h));
  CHECK(parsed(text).settings->comparisons[0].window_pairs == 100);
}

TEST_CASE("error ratios") {
  const auto ratio = [](const std::string& setting) {
    std::string text = kMill;
    text.replace(text.find(", window: {pairs: 100, age: none}"), 33, setting);
    return parsed(text).settings->comparisons[0].error_ratio;
  };
  CHECK(ratio("").source == ErrorSource::check_standards);
  CHECK(ratio(", error_ratio: from_check_standards").source == ErrorSource::check_standards);
  const auto sds = ratio(", error_ratio: {sd_x: 0.018, sd_y: 0.020}");
  CHECK(sds.source == ErrorSource::given_sds);
  CHECK(sds.sd_x == Approx(0.018));
  CHECK(sds.sd_y == Approx(0.020));
  const auto lambda = ratio(", error_ratio: {lambda: 1.5}");
  CHECK(lambda.source == ErrorSource::given_lambda);
  CHECK(lambda.lambda == Approx(1.5));
}

TEST_CASE("how errors grow, and the fit that goes with it") {
  const auto comparison = [](const std::string& setting) {
    std::string text = kMill;
    text.replace(text.find(", window: {pairs: 100, age: none}"), 33, setting);
    return parsed(text).settings->comparisons[0];
  };
  CHECK(comparison("").error_growth == ErrorGrowth::constant);
  CHECK(comparison("").fit == FitMethod::deming);
  CHECK(comparison(", error_model: proportional").error_growth == ErrorGrowth::proportional);
  CHECK(comparison(", error_model: proportional").fit == FitMethod::deming);
  CHECK(comparison(", error_model: mixed").error_growth == ErrorGrowth::mixed);
  const ComparisonSettings weighted = comparison(", fit: weighted_deming, error_ratio: {lambda: 1.5}");
  CHECK(weighted.fit == FitMethod::weighted_deming);
  CHECK(weighted.error_growth == ErrorGrowth::proportional);
  CHECK(comparison(", error_ratio: from_replicates").error_ratio.source == ErrorSource::replicates);
}

TEST_CASE("a route with every filter, and one with none") {
  const Config config = parsed(kMill +
                               "alerts:\n"
                               "  remind_every: 4h\n"
                               "  reopen_within: 12h\n"
                               "  routes:\n"
                               "    - {name: shift, url: \"https://chat.harrow.example/hooks/a1\", unsigned: "
                               "true, at_least: warning,\n"
                               "       kinds: [agreement_lost, pair_outlier], analyzers: [line1], "
                               "measurands: [protein], comparisons: [protein]}\n"
                               "    - {name: all, url: \"http://127.0.0.1:9099/agreed\", unsigned: true}\n");
  CHECK(config.alert_policy.remind_every == Duration(4h));
  CHECK(config.alert_policy.reopen_within == Duration(12h));
  REQUIRE(config.routes.size() == 2);
  const Route& shift = config.routes[0];
  CHECK(shift.kinds == std::vector<AlertKind>{AlertKind::agreement_lost, AlertKind::pair_outlier});
  CHECK(shift.at_least == Severity::warning);
  CHECK(shift.analyzers == std::vector<std::string>{"line1"});
  CHECK(shift.measurands == std::vector<std::string>{"protein"});
  CHECK(shift.comparisons == std::vector<std::string>{"protein"});
  CHECK(shift.unsigned_);
  CHECK(config.routes[1].kinds.empty());
  CHECK(config.routes[1].at_least == Severity::notice);
}

TEST_CASE("others may reach the service once a token or an explicit word allows it") {
  CHECK(parsed(kMill + "listen: {address: 0.0.0.0, open_to_network: true}\n").listen.open_to_network);
  CHECK(parsed(kMill + "listen: {address: 0.0.0.0, port: 0}\naccess: {tokens_file: t}\n").listen.port == 0);
  CHECK(parsed(kMill + "listen: {address: \"::1\"}\n").listen.address == "::1");
  CHECK(parsed(kMill + "listen: {behind_proxy: true}\naccess: {tokens_file: t}\n").listen.behind_proxy);
}

TEST_CASE("the text is kept as read") {
  CHECK(parsed(kMill).text == kMill);
}

TEST_CASE("when alerts are held, what counts as overdue, and who waits for an acknowledgement") {
  const Config config =
      parsed(kMill +
             "least_free_mb: 50\n"
             "alerts:\n"
             "  hold: 30min\n"
             "  overdue_after: 2\n"
             "  quiet: [{days: [sat, sun]}, {from: \"22:00\", to: \"06:30\"}]\n"
             "  maintenance: [{analyzer: line2, from: 2026-03-02T08:00:00Z, to: "
             "2026-03-02T16:00:00Z}]\n"
             "  routes:\n"
             "    - {name: chief, url: http://127.0.0.1:1/x, unsigned: true, heartbeat: 1d, "
             "unacknowledged_for: 30min}\n");
  const AlertPolicy& policy = config.alert_policy;
  CHECK(config.least_free_mb.value_or(0) == Approx(50));
  CHECK(policy.hold == 30min);
  CHECK(policy.overdue.patience == Approx(2));
  REQUIRE(policy.overdue.quiet.size() == 2);
  CHECK(policy.overdue.quiet[0].days == std::array<bool, 7>{false, false, false, false, false, true, true});
  CHECK(policy.overdue.quiet[0].from == 0min);
  CHECK(policy.overdue.quiet[0].to == 24h);
  CHECK(policy.overdue.quiet[1].days == std::array<bool, 7>{true, true, true, true, true, true, true});
  CHECK(policy.overdue.quiet[1].from == 22h);
  CHECK(policy.overdue.quiet[1].to == 6h + 30min);
  REQUIRE(policy.maintenance.size() == 1);
  CHECK(policy.maintenance[0].analyzer == AnalyzerIndex{1});
  CHECK(policy.maintenance[0].to - policy.maintenance[0].from == 8h);
  CHECK(config.routes[0].heartbeat == Duration(24h));
  CHECK(config.routes[0].unacknowledged_for == Duration(30min));
}
