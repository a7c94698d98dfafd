// The manual pages say everything that the program reads, and nothing else.
#include <algorithm>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <set>
#include <string>
#include <vector>

#include <doctest/doctest.h>
#include <re2/re2.h>

#include "config/schema.hpp"
#include "daemon/cli/command_help.hpp"
#include "daemon/cli/command_line.hpp"
#include "daemon/manual/command_page.hpp"
#include "daemon/manual/roff.hpp"
#include "daemon/manual/settings_page.hpp"

using namespace agreed;
namespace fs = std::filesystem;

namespace {

bool has(const std::string& text, const std::string& part) {
  return text.find(part) != std::string::npos;
}

std::string as_entry(std::string key) {
  for (std::size_t star = key.find('*'); star != std::string::npos; star = key.find('*'))
    key.replace(star, 1, "ID");
  return ".TP\n" + manual::bold(key) + '\n';
}

std::string content(const fs::path& file) {
  std::ifstream in(file, std::ios::binary);
  return {std::istreambuf_iterator<char>(in), {}};
}

std::string the_commands() {
  return manual::command_page(command_help(), "2026-01-05", "0.1.0");
}

/// A command's name as the page writes it: its hyphens are those that are typed.
std::string written(std::string name) {
  RE2::GlobalReplace(&name, "-", "\\\\-");
  return name;
}

/// What the pattern's one group matched, each time it was found.
void collect(const std::string& text, const RE2& pattern, std::set<std::string>& found) {
  re2::StringPiece at(text);
  std::string match;
  while (RE2::FindAndConsume(&at, pattern, &match)) found.insert(match);
}

/// The part of the page below a command's heading.
std::string chapter(const std::string& page, const std::string& command) {
  const std::size_t begin = page.find(".SS " + command + '\n');
  REQUIRE(begin != std::string::npos);
  return page.substr(begin, page.find("\n.S", begin + 1) - begin);
}

}  // namespace

TEST_CASE("every key of the schema has its entry, with its reason and default, once") {
  const std::string page = manual::settings_page("site: Harrow Mill\n", "2026-01-05", "0.1.0");
  std::size_t entries = 0;
  for (std::size_t at = page.find(".TP\n"); at != std::string::npos; at = page.find(".TP\n", at + 1))
    ++entries;
  CHECK(entries == settings_file::schema().size());
  for (const settings_file::SettingRow& row : settings_file::schema()) {
    CAPTURE(std::string(row.key));
    const std::size_t begin = page.find(as_entry(std::string(row.key)));
    REQUIRE(begin != std::string::npos);
    std::string entry = page.substr(begin, page.find("\n.", begin + 5) - begin);
    std::replace(entry.begin(), entry.end(), '\n', ' ');
    std::string why = manual::prose(row.why);
    std::replace(why.begin(), why.end(), '\n', ' ');
    CHECK(has(entry, why.substr(0, why.size() - 1)));
    CHECK(has(entry, "Default: ") == !row.fallback.empty());
    CHECK(has(entry, "Required.") == row.is_required);
  }
}

TEST_CASE("every command has its chapter, with each of its options and an example") {
  const std::string page = the_commands();
  const auto commands = command_help();
  CHECK(commands.size() > 10);
  for (std::size_t i = 1; i < commands.size(); ++i) {
    const CommandHelp& command = commands[i];
    CAPTURE(command.name);
    const std::string text = chapter(page, command.name);
    CHECK(has(text, ".EX\nagreed " + written(command.name) + ' '));
    for (const ArgumentHelp& argument : command.arguments) {
      CAPTURE(argument.name);
      CHECK_FALSE(argument.what.empty());
      const std::string name = argument.name == "--help" ? "-h, --help" : argument.name;
      CHECK(has(text, ".TP\n" + manual::bold(name)));
    }
  }
}

TEST_CASE("what the page says of is what --help lists") {
  for (const CommandHelp& command : command_help()) {
    CAPTURE(command.name);
    const std::vector<std::string> asked = command.name == "agreed"
                                               ? std::vector<std::string>{"--help"}
                                               : std::vector<std::string>{command.name, "--help"};
    const Command parsed = parse_command_line(asked);
    const std::string help = std::get<Say>(parsed).text;
    std::set<std::string> listed, told;
    collect(help, "\n  (?:-h,)?(--[a-z-]+)", listed);
    for (const ArgumentHelp& argument : command.arguments)
      if (argument.is_option) told.insert(argument.name);
    CHECK(listed == told);
    CHECK_FALSE(told.empty());
  }
}

TEST_CASE("every environment variable that the program reads is told") {
  const std::string page = the_commands();
  std::set<std::string> names;
  for (const fs::directory_entry& file :
       fs::recursive_directory_iterator(fs::path(AGREED_SOURCE_DIR) / "daemon")) {
    if (file.path().extension() != ".cpp") continue;
    collect(content(file.path()), "(?:getenv|variable)\\(\"([A-Z_]+)\"\\)", names);
  }
  CHECK(names.size() >= 4);
  for (const std::string& name : names) CHECK_MESSAGE(has(page, manual::bold(name)), name);
}

TEST_CASE("the signals told are those that the program waits for") {
  std::set<std::string> waited_for, told;
  for (const fs::directory_entry& file :
       fs::recursive_directory_iterator(fs::path(AGREED_SOURCE_DIR) / "daemon")) {
    if (file.path().extension() != ".cpp") continue;
    std::set<std::string> lists;
    collect(content(file.path()), "\\{(SIG[A-Z0-9]+(?:, SIG[A-Z0-9]+)*)\\}\\) sigaddset", lists);
    for (const std::string& list : lists) collect(list, "(SIG[A-Z0-9]+)", waited_for);
    collect(content(file.path()), "(?:signal|sigaction)\\((SIG[A-Z0-9]+), *[&a-z]", waited_for);
  }
  const std::string page = the_commands();
  const std::size_t begin = page.find(".SH SIGNALS\n");
  REQUIRE(begin != std::string::npos);
  std::set<std::string> entries;
  collect(page.substr(begin, page.find("\n.SH ", begin) - begin), "\\.TP\n\\\\fB([^\\\\]*)", entries);
  for (const std::string& entry : entries) collect(entry, "(SIG[A-Z0-9]+)", told);
  CHECK(waited_for.size() >= 3);
  CHECK(told == waited_for);
}

TEST_CASE("what would be a request or an escape to man is only text") {
  CHECK(manual::prose(".so /etc/passwd") == "\\&.so /etc/passwd\n");
  CHECK(manual::prose("'quoted' a\\b ~ ^") == "\\(aqquoted\\(aq a\\eb \\(ti \\(ha\n");
  CHECK(manual::typed("  a\n.b\n") == ".PP\n.RS 4\n.EX\n  a\n\\&.b\n.EE\n.RE\n");
  CHECK(manual::prose("  two   words \n") == "two words\n");
  CHECK(manual::prose("") == "");
}

TEST_CASE("a mistyped option is told the nearest, before what else is missing") {
  const auto said = [](const std::vector<std::string>& arguments) {
    return std::get<Say>(parse_command_line(arguments)).text;
  };
  CHECK(has(said({"token", "agreed.yaml", "--rolle", "operator"}),
            "no option '--rolle'; did you mean --role?"));
  CHECK(has(said({"verify", "agreed.yaml", "--fiel=x"}), "no option '--fiel'; did you mean --file?"));
  CHECK(has(said({"--versoin"}), "no option '--versoin'; did you mean --version?"));
  CHECK_FALSE(has(said({"run", "agreed.yaml", "--quietly"}), "did you mean"));
  CHECK(has(said({"token", "agreed.yaml"}), "--role is required"));
}
