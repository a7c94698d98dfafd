// The forms a configuration may come in, and those that are none.
#include <algorithm>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <random>
#include <string>

#include <doctest/doctest.h>
#include <unistd.h>

#include "config/config.hpp"

using namespace agreed;
namespace fs = std::filesystem;

namespace {

const fs::path kReference = fs::path(AGREED_SOURCE_DIR) / "config" / "reference.yaml";

std::string text_of(const fs::path& file) {
  std::ifstream stream(file, std::ios::binary);
  return {std::istreambuf_iterator<char>(stream), std::istreambuf_iterator<char>()};
}

std::string first_problem(const ConfigResult& result) {
  return result.problems.empty() ? "" : to_string(result.problems.front(), "f");
}

bool fails_with(const ConfigResult& result, const std::string& words) {
  return !result.config && first_problem(result).find(words) != std::string::npos;
}

/// Either a configuration or an error, every problem with words and a place in the file.
void check_consistent(const ConfigResult& result, const std::string& text) {
  bool error = false;
  const auto lines = 1 + std::count(text.begin(), text.end(), '\n');
  for (const ConfigProblem& problem : result.problems) {
    error = error || !problem.warning;
    REQUIRE_FALSE(problem.message.empty());
    REQUIRE(problem.line >= 0);
    REQUIRE(problem.line <= lines + 1);
  }
  REQUIRE(result.config.has_value() != error);
}

}  // namespace

TEST_CASE("a byte order mark and CR LF are fine") {
  const std::string text = text_of(kReference);
  std::string crlf = "\xEF\xBB\xBF";
  for (const char c : text) crlf += c == '\n' ? std::string("\r\n") : std::string(1, c);
  const ConfigResult result = parse_config(crlf, kReference);
  REQUIRE_MESSAGE(result.config.has_value(), first_problem(result));
  CHECK(result.config->settings->site == "Harrow Mill");
  CHECK(fails_with(parse_config("\xEF\xBB\xBFsite: x\r\nlisten: {port: x}\r\n", "f"),
                   "f:1:1: analyzers: missing"));
}

TEST_CASE("JSON is read as it is, quoted numbers included") {
  const std::string json =
      "{\n\t\"site\": \"Harrow Mill \\u00e9\",\n"
      "\t\"analyzers\": {\"line1\":{\"inbox\":\"drop\\/line1\"},\"line2\":{\"inbox\":\"drop/line2\"}},\n"
      "\t\"measurands\": {\"protein\": {\"unit\": \"g/100 g\", \"decimals\": \"2\", \"decision_levels\": "
      "[10.5, \"13.0\"],\n"
      "\t\t\"allowable_difference\":{\"absolute\":2e-1}}},\n"
      "\t\"check_standards\": {\"wheat-low\": {\"measurands\":{\"protein\":{}}}},\n"
      "\t\"comparisons\": {\"protein\":{\"measurand\":\"protein\",\"x\":\"line1\",\"y\":\"line2\"}}\n}\n";
  const ConfigResult result = parse_config(json, "/nowhere/agreed.json");
  REQUIRE_MESSAGE(result.config.has_value(), first_problem(result));
  CHECK(result.problems.empty());
  CHECK(result.config->settings->site == "Harrow Mill \xC3\xA9");
  CHECK(result.config->settings->measurands[0].decision_levels.size() == 2);
  CHECK(result.config->settings->measurands[0].decimals == 2);
}

TEST_CASE("what is no configuration at all is told so") {
  CHECK(fails_with(parse_config("", "f"), "f: found nothing, expected the sections of a configuration"));
  CHECK(fails_with(parse_config("# nothing yet\n", "f"), "found nothing"));
  CHECK(fails_with(parse_config("[1, 2]\n", "f"), "f:1:1: found a list"));
  CHECK(fails_with(parse_config("hello\n", "f"), "f:1:1: found 'hello'"));
  CHECK(fails_with(parse_config("site: Harrow \xFC Mill\n", "f"), "f:1:14: found a byte that is not UTF-8"));
  CHECK(fails_with(parse_config(std::string("\xFF\xFEs\0i\0", 6), "f"),
                   "f:1:1: found a byte that is not UTF-8"));
  CHECK(fails_with(parse_config(std::string("site: x\na: \0b\n", 13), "f"),
                   "f:2:4: found a control character"));
  CHECK(fails_with(parse_config("a: " + std::string(3000, '['), "f"), "nested too deeply"));
}

TEST_CASE("aliases are refused, never followed") {
  std::string bomb = "a0: &a0 [x, x, x, x, x, x, x, x, x, x]\n";
  for (int i = 1; i < 12; ++i) {
    const std::string name = std::to_string(i), before = std::to_string(i - 1);
    bomb.append("a").append(name).append(": &a").append(name).append(" [");
    for (int j = 0; j < 10; ++j) bomb.append("*a").append(before).append(", ");
    bomb += "]\n";
  }
  const ConfigResult result = parse_config(bomb, "f");
  check_consistent(result, bomb);
  const bool told = std::any_of(result.problems.begin(), result.problems.end(), [](const ConfigProblem& p) {
    return p.line == 2 && p.message.find("aliases are not read") != std::string::npos;
  });
  CHECK(told);
}

TEST_CASE("files that cannot be read are told so") {
  CHECK(fails_with(read_config("/nowhere/agreed.yaml"), "there is no such file"));
  CHECK(fails_with(read_config(fs::temp_directory_path()), "found a folder"));
  const fs::path large = fs::temp_directory_path() / ("agreed_large_" + std::to_string(getpid()) + ".yaml");
  std::ofstream(large) << std::string(5U << 20U, '#');
  CHECK(fails_with(read_config(large), "found more than 4 MiB"));
  fs::remove(large);
}

TEST_CASE("thousands of faults are cut to a list that can be read, errors first") {
  std::string text;
  for (int i = 0; i < 5000; ++i) text.append("k").append(std::to_string(i)).append(": 1\n");
  const ConfigResult result = parse_config(text, "f");
  CHECK(result.problems.size() == 501);
  CHECK(result.problems.back().message == "and 4503 more");  // 5,000 and three required keys
  CHECK_FALSE(result.problems.back().warning);
}

TEST_CASE("every beginning of the reference file is answered") {
  const std::string text = text_of(kReference);
  for (std::size_t length = 0; length < text.size(); length += 23) {
    const std::string part = text.substr(0, length);
    CAPTURE(length);
    check_consistent(parse_config(part, kReference), part);
  }
}

TEST_CASE("2,000 damaged reference files are answered, and none throws") {
  constexpr unsigned kSeed = 7'480;
  MESSAGE("seed ", kSeed);
  const std::string good = text_of(kReference);
  std::mt19937 random(kSeed);
  const auto below = [&](std::size_t n) {
    return std::uniform_int_distribution<std::size_t>(0, n - 1)(random);
  };
  const std::string spice = "{}[]:,-#&*!|>'\"%@`? \n\t\r~<0123456789.eE\\\x01\x7F\xC3\xFF";
  int accepted = 0;
  for (int run = 0; run < 2000; ++run) {
    std::string text = good;
    for (std::size_t damage = 1 + below(6); damage > 0; --damage) {
      const std::size_t at = below(text.size());
      const std::size_t length = std::min(text.size() - at, 1 + below(40));
      switch (below(5)) {
        case 0:
          text[at] = spice[below(spice.size())];
          break;
        case 1:
          text.insert(at, 1, spice[below(spice.size())]);
          break;
        case 2:
          text.erase(at, length);
          break;
        case 3:
          text.insert(below(text.size()), text.substr(at, length));
          break;
        default:
          text.insert(at, std::string(length, spice[below(spice.size())]));
          break;
      }
      if (text.empty()) text.assign(1, ' ');
    }
    CAPTURE(run);
    const ConfigResult result = parse_config(text, kReference);
    check_consistent(result, text);
    accepted += result.config.has_value() ? 1 : 0;
  }
  // Damage inside comments is harmless, elsewhere mostly not: both must happen, or the test tests nothing.
  CHECK(accepted > 50);
  CHECK(accepted < 1500);
}
