#pragma once
// Reads a text through a mapped format that is given as it stands in the configuration.
#include <string>
#include <string_view>

#include <doctest/doctest.h>

#include "config/config.hpp"
#include "tests/daemon/intake/read_plain.hpp"

namespace agreed::testing {

/// A flour mill with line1 and line2, wheat-low and wheat-high, protein and moisture; line1 has the format
/// `own`, whose keys are `format`.
inline ConfigResult mill_with(const std::string& format) {
  return parse_config(
      "site: Harrow Mill\n"
      "analyzers:\n"
      "  line1: {inbox: drop/line1, format: own, zone: Europe/Dublin}\n"
      "  line2: {inbox: drop/line2}\n"
      "measurands: {protein: {unit: g/100 g}, moisture: {unit: g/100 g}}\n"
      "check_standards:\n"
      "  wheat-low: {measurands: {protein: {}, moisture: {}}}\n"
      "  wheat-high: {measurands: {protein: {}}}\n"
      "comparisons: {protein: {measurand: protein, x: line1, y: line2}}\n"
      "formats:\n  own:\n" +
          format,
      "/nowhere/agreed.yaml");
}

/// In the folder of line1, with "now" 2026-03-01.
inline ReadFile read_mapped(const std::string& format, std::string_view text, std::size_t block = 64 * 1024) {
  const ConfigResult result = mill_with(format);
  for (const ConfigProblem& problem : result.problems) INFO(to_string(problem, "f"));
  REQUIRE_MESSAGE(result.config.has_value(), result.problems.at(0).message);
  const Config& config = *result.config;
  const PlainContext context{*config.settings,
                             AnalyzerIndex{0},
                             standards_of(*config.settings, {0}),
                             std::make_shared<LocalZone>(config.intake[0].zone),
                             at("2000-01-01T00:00:00Z"),
                             at("2026-03-01T00:00:00Z"),
                             config.intake[0].mapped};
  ReadFile file;
  PlainReader reader(context, PlainSyntax::csv, file);
  read_all(reader, text, block, true, file);
  return file;
}

}  // namespace agreed::testing
