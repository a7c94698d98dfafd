// What is in effect, for a person to read.
#include "config/describe.hpp"

#include <string>

#include <doctest/doctest.h>

using namespace agreed;

namespace {

std::string description() {
  const ConfigResult result = parse_config(
      "site: Harrow Mill\n"
      "listen: {port: 0}\n"
      "analyzers: {line2: {inbox: drop/line2}, line1: {inbox: drop/line1, title: First}}\n"
      "measurands: {protein: {unit: g/100 g, decision_levels: [10.5, 20], allowable_difference: {absolute: "
      "0.2, "
      "percent: 1.5}}}\n"
      "check_standards: {wheat-low: {every: 8h, lot: 2026-A, measurands: {protein: {reference: 10.62}}}}\n"
      "charts: {in_control_run_length: 3650}\n"
      "comparisons: {protein: {measurand: protein, x: line1, y: line2, in_control_run_length: 14600, "
      "error_ratio: {lambda: 1.5}}}\n"
      "alerts:\n"
      "  routes:\n"
      "    - {name: shift, url: \"https://chat.harrow.example/hooks/hidden\", unsigned: true, kinds: "
      "[agreement_lost]}\n",
      "/etc/agreed/agreed.yaml");
  REQUIRE(result.config.has_value());
  return describe(*result.config);
}

bool has(const std::string& text, const std::string& part) {
  return text.find(part) != std::string::npos;
}

}  // namespace

TEST_CASE("the description shows the values in effect, defaults too") {
  const std::string text = description();
  INFO(text);
  CHECK(text.rfind("Harrow Mill\n", 0) == 0);
  CHECK(has(text, "  listen                  127.0.0.1, any free port\n"));
  CHECK(has(text, "    inbox                 /etc/agreed/drop/line1\n"));
  CHECK(has(text, "    settle, rescan        2s, 15s\n"));
  CHECK(has(text, "    decision_levels       10.5 (+-0.2), 20 (+-0.3)\n"));
  CHECK(has(text, "    lots                  2026-A (reference 10.62)\n"));
  CHECK(has(text, "    every                 8h\n"));
  CHECK(has(text, "    every                 2h (assumed for the alarm budget, never called overdue)\n"));
  CHECK(has(text, "    window                200 pairs, none older than 90d\n"));
  CHECK(has(text, "lambda = var(x error)/var(y error) = 1.5, to a factor of 2\n"));
  CHECK(has(text, "  remind_every            8h\n"));
  CHECK(text.find("line1/wheat-low/protein") < text.find("line2/wheat-low/protein"));
}

TEST_CASE("run lengths stand with their limits") {
  // By tests/data/run_lengths.csv.
  const std::string text = description();
  INFO(text);
  CHECK(has(text, "    level                 3650 readings, h = 4.08\n"));
  CHECK(has(text, "    precision             3650 readings, h = 3.62\n"));
  CHECK(has(text, "    pair chart, warning   14600 pairs, h = 4.34\n"));
  CHECK(has(text, "    pair chart, critical  146000 pairs, h = 4.87 (extrapolated)\n"));
  CHECK(has(text, "    outliers              set_aside, a false one every 29200 pairs\n"));
}

TEST_CASE("the alarm budget is accounted for by kind") {
  const std::string text = description();
  INFO(text);
  CHECK(has(text, "  allowed                 6 false alerts a year\n"));
  // Scatter is not tested where lambda alone is given, so its share is not spent.
  CHECK(has(text, "  expected                1.65 a year\n"));
  CHECK(has(text, "    check_standard_unstable 1.20\n"));
  CHECK(has(text, "    agreement_drifting    0.30\n"));
}

TEST_CASE("of a webhook only the place is shown, since its path may be a secret") {
  const std::string text = description();
  INFO(text);
  CHECK(has(text, "  shift                   https://chat.harrow.example\n"));
  CHECK(has(text, "    kinds                 agreement_lost\n"));
  CHECK_FALSE(has(text, "hidden"));
}

TEST_CASE("an export format is shown once, with the analyzers that use it and what its columns mean") {
  const ConfigResult result = parse_config(
      "site: Harrow Mill\n"
      "listen: {port: 0}\n"
      "analyzers: {line1: {inbox: drop/line1, format: run_list}, line2: {inbox: drop/line2, format: "
      "run_list}}\n"
      "formats:\n"
      "  run_list:\n"
      "    delimiter: tab\n"
      "    decimal: \",\"\n"
      "    skip_lines: 1\n"
      "    files: \"*.txt\"\n"
      "    time: {columns: [Day, Hour], pattern: \"%d.%m.%Y %H:%M\", zone: Europe/Berlin}\n"
      "    item: {column: Sample}\n"
      "    items: {LOW: wheat-low}\n"
      "    kind: {check_when_item_matches: \"^LOW$\"}\n"
      "    values: {protein: {column: Reading, factor: 0.1}}\n"
      "measurands: {protein: {unit: g/100 g}}\n"
      "check_standards: {wheat-low: {measurands: {protein: {}}}}\n",
      "/etc/agreed/agreed.yaml");
  REQUIRE(result.config.has_value());
  CHECK(has(describe(*result.config),
            "\nFormats\n"
            "  run_list                of line1, line2\n"
            "    syntax                delimited by tab, header row, skips 1 line\n"
            "    encoding, numbers     utf-8, decimal ','\n"
            "    files                 '*.txt', whole\n"
            "    time                  Day, Hour as '%d.%m.%Y %H:%M', zone Europe/Berlin\n"
            "    item                  Sample (LOW = wheat-low)\n"
            "    kind                  check where the item matches '^LOW$', else split\n"
            "    results               protein = Reading x 0.1\n"
            "\nMeasurands\n"));
}
