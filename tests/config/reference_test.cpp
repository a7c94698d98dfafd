// The reference file says what the schema says, and both say what the program does.
#include <algorithm>
#include <filesystem>
#include <fstream>
#include <map>
#include <set>
#include <string>
#include <vector>

#include <doctest/doctest.h>

#include "config/config.hpp"
#include "config/problems.hpp"
#include "config/row_value.hpp"
#include "config/schema.hpp"
#include "config/yaml_tree.hpp"

using namespace agreed;
using namespace agreed::settings_file;
namespace fs = std::filesystem;

namespace {

const fs::path kRoot = AGREED_SOURCE_DIR;
const fs::path kReference = kRoot / "config" / "reference.yaml";

/// A setting that is switched off: "#key", "#  key" or "#  - key" after the indentation; prose has one space.
bool is_switched_off(const std::string& line) {
  const std::size_t mark = line.find_first_not_of(' ');
  if (mark == std::string::npos || line[mark] != '#') return false;
  const std::size_t first = line.find_first_not_of(' ', mark + 1);
  return first != std::string::npos && first != mark + 2 &&
         (line[first] == '-' || (line[first] >= 'a' && line[first] <= 'z'));
}

std::vector<std::string> reference_lines() {
  std::ifstream stream(kReference);
  std::vector<std::string> lines;
  for (std::string line; std::getline(stream, line);) lines.push_back(line);
  return lines;
}

std::string with_everything_on() {
  std::string text;
  for (std::string line : reference_lines()) {
    if (is_switched_off(line)) line.erase(line.find('#'), 1);
    text += line + '\n';
  }
  return text;
}

struct Seen {
  std::set<std::string> values;  // of scalars
  std::vector<int> lines;
};

/// Every key of the tree under the key of its row.
void collect(const TreeNode& map, const std::string& pattern, std::map<std::string, Seen>& seen) {
  for (const TreeNode& child : map.children) {
    const SettingRow* row = find_row(pattern, child.key);
    REQUIRE_MESSAGE(row != nullptr, "line ", child.key_at.line, ": ", child.key);
    Seen& entry = seen[std::string(row->key)];
    entry.lines.push_back(child.key_at.line);
    if (child.kind == NodeKind::scalar) entry.values.insert(child.text);
    const std::string below = pattern_below(*row);
    const bool of_sections =
        row->type == Type::named || row->type == Type::list || row->type == Type::texts_or_sections;
    if (of_sections) {
      for (const TreeNode& element : child.children) collect(element, below, seen);
    } else if (child.kind == NodeKind::map && row->type != Type::text_map) {
      collect(child, below, seen);
    }
  }
}

std::map<std::string, Seen> everything_seen() {
  Problems problems;
  const auto root = parse_yaml(with_everything_on(), problems);
  REQUIRE(root.has_value());
  std::map<std::string, Seen> seen;
  collect(*root, "", seen);
  return seen;
}

std::string told(const ConfigResult& result) {
  std::string text;
  for (const ConfigProblem& problem : result.problems) text += to_string(problem, "f") + '\n';
  return text;
}

}  // namespace

TEST_CASE("every row of the schema has a key of its own, a reason and a default that can be used") {
  std::set<std::string_view> keys;
  for (const SettingRow& row : schema()) {
    CAPTURE(std::string(row.key));
    CHECK(keys.insert(row.key).second);
    CHECK_FALSE(row.why.empty());
    CHECK(row.why.find('\n') == std::string_view::npos);
    if (!row.fallback.empty()) CHECK_FALSE(complaint(row, row.fallback).has_value());
    CHECK_FALSE((row.is_required && !row.fallback.empty()));
    const bool of_words =
        row.type == Type::word || row.type == Type::word_list || row.type == Type::word_or_section;
    CHECK(of_words == !row.choices.empty());
  }
  CHECK(keys.size() > 100);
}

TEST_CASE("every key of the schema stands in the reference file with its default") {
  const auto seen = everything_seen();
  for (const SettingRow& row : schema()) {
    CAPTURE(std::string(row.key));
    const auto found = seen.find(std::string(row.key));
    CHECK(found != seen.end());
    if (found == seen.end() || row.fallback.empty()) continue;
    CHECK(found->second.values.count(std::string(row.fallback)) == 1);
  }
}

TEST_CASE(
    "every key of the reference file stands in the schema, and a default is called one exactly where it is") {
  const auto lines = reference_lines();
  for (const auto& [key, seen] : everything_seen()) {
    CAPTURE(key);
    const auto& all = schema();
    const auto row = std::find_if(all.begin(), all.end(), [&](const SettingRow& r) { return r.key == key; });
    REQUIRE(row != all.end());
    bool called_default = false;
    for (const int line : seen.lines) {
      const std::string& text = lines.at(static_cast<std::size_t>(line - 1));
      called_default = called_default || text.find(" # default;") != std::string::npos;
    }
    CHECK(called_default == !row->fallback.empty());
  }
}

TEST_CASE("each key is explained where it first stands") {
  const auto lines = reference_lines();
  for (const auto& [key, seen] : everything_seen()) {
    CAPTURE(key);
    const std::string& text =
        lines.at(static_cast<std::size_t>(*std::min_element(seen.lines.begin(), seen.lines.end()) - 1));
    const std::size_t mark = text.find(" # ");
    CHECK(mark != std::string::npos);
    CHECK(text.size() <= 130);
  }
}

TEST_CASE("the reference file loads as it stands, without a warning") {
  const ConfigResult result = read_config(kReference);
  REQUIRE_MESSAGE(result.config.has_value(), told(result));
  CHECK_MESSAGE(result.problems.empty(), told(result));
  CHECK(result.config->settings->charts.size() == 8);
  CHECK(result.config->settings->comparisons.size() == 2);
  // The worked example of the alarm budget.
  for (const auto& chart : result.config->settings->charts)
    CHECK(chart.level_run_length == doctest::Approx(3650));
}

TEST_CASE("what is switched off in the reference file is right but for what needs a secret") {
  const ConfigResult result = parse_config(with_everything_on(), kReference);
  CHECK_FALSE(result.problems.empty());
  for (const ConfigProblem& problem : result.problems) {
    const auto has = [&](const char* words) { return problem.message.find(words) != std::string::npos; };
    const bool to_be_expected = has("there is no file") || has("is not set") ||
                                has("sd_x and sd_y or lambda alone") || has("all run rules together") ||
                                has("a false signal every about");
    CHECK_MESSAGE(to_be_expected, to_string(problem, "reference.yaml"));
  }
}

TEST_CASE("defaults of the schema are those of the settings' own types") {
  const ConfigResult result = read_config(kRoot / "examples" / "first.yaml");
  REQUIRE_MESSAGE(result.config.has_value(), told(result));
  const Config& config = *result.config;
  const Settings& settings = *config.settings;
  CHECK(settings.alarm_budget.allowed_per_year == doctest::Approx(AlarmBudget{}.allowed_per_year));
  CHECK(config.listen.address == Listen{}.address);
  CHECK(config.listen.port == Listen{}.port);
  CHECK(config.listen.open_to_network == Listen{}.open_to_network);
  CHECK(config.listen.behind_proxy == Listen{}.behind_proxy);
  CHECK(config.alert_policy.remind_every == AlertPolicy{}.remind_every);
  CHECK(config.alert_policy.reopen_within == AlertPolicy{}.reopen_within);
  const IntakeSettings& intake = config.intake[0];
  CHECK(intake.format == IntakeSettings{}.format);
  CHECK(intake.zone == IntakeSettings{}.zone);
  CHECK(intake.settle == IntakeSettings{}.settle);
  CHECK(intake.rescan == IntakeSettings{}.rescan);
  CHECK(intake.on_bad_row == IntakeSettings{}.on_bad_row);
  CHECK(intake.not_before == std::chrono::sys_days{std::chrono::January / 1 / 2000});
  const ChartSettings& chart = settings.charts[0];
  CHECK(chart.method == ChartSettings{}.method);
  CHECK(chart.classical.run_spread == ClassicalSettings{}.run_spread);
  CHECK(chart.baseline == ChartSettings{}.baseline);
  CHECK(chart.split_memory == ChartSettings{}.split_memory);
  CHECK(chart.clear_after == ChartSettings{}.clear_after);
  const ComparisonSettings &comparison = settings.comparisons[0], plain;
  CHECK(comparison.window_pairs == plain.window_pairs);
  CHECK(comparison.window_age == Duration(std::chrono::hours(90 * 24)));
  CHECK(comparison.error_ratio.source == plain.error_ratio.source);
  CHECK(comparison.fit == plain.fit);
  CHECK(comparison.confidence == doctest::Approx(plain.confidence));
  CHECK(comparison.confirm == plain.confirm);
  CHECK(comparison.alert_confidence == doctest::Approx(plain.alert_confidence));
  CHECK(comparison.least_pairs == plain.least_pairs);
  CHECK(comparison.pair_within == plain.pair_within);
  CHECK(comparison.set_outliers_aside == plain.set_outliers_aside);
  CHECK(comparison.split_memory == plain.split_memory);
  CHECK(comparison.prove_within == plain.prove_within);
}

TEST_CASE("the reference file's protein comparison has the defaults too") {
  const ConfigResult reference = read_config(kReference);
  const ConfigResult first = read_config(kRoot / "examples" / "first.yaml");
  REQUIRE(reference.config.has_value());
  REQUIRE(first.config.has_value());
  const ComparisonSettings& a = reference.config->settings->comparisons.at(1);
  const ComparisonSettings& b = first.config->settings->comparisons.at(0);
  CHECK(a.id == b.id);
  CHECK(a.window_pairs == b.window_pairs);
  CHECK(a.window_age == b.window_age);
  CHECK(a.confirm == b.confirm);
  CHECK(a.least_pairs == b.least_pairs);
  CHECK(a.pair_within == b.pair_within);
  CHECK(a.every == b.every);
}

TEST_CASE("the first configuration loads, without a warning") {
  const ConfigResult result = read_config(kRoot / "examples" / "first.yaml");
  REQUIRE_MESSAGE(result.config.has_value(), told(result));
  CHECK_MESSAGE(result.problems.empty(), told(result));
}
