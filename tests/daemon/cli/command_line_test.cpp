// What a command line means, and what a wrong one is told.
#include "daemon/cli/command_line.hpp"

#include <doctest/doctest.h>

using namespace agreed;

namespace {

Command parse(const std::vector<std::string>& arguments) {
  return parse_command_line(arguments);
}

/// The text of what is only said; the exit status must be `code`.
std::string said(const std::vector<std::string>& arguments, int code) {
  const Command command = parse(arguments);
  const Say* const say = std::get_if<Say>(&command);
  REQUIRE(say != nullptr);
  CHECK(say->code == code);
  return say->text;
}

bool holds(const std::string& text, const std::string& part) {
  return text.find(part) != std::string::npos;
}

const std::vector<std::string> kCommands = {"run",   "check",     "example", "verify", "backup", "restore",
                                            "token", "send-test", "resend",  "status", "replay", "plan"};

}  // namespace

TEST_CASE("a mistyped command is told the nearest") {
  for (const std::string& command : kCommands) {
    CAPTURE(command);
    std::string mistyped = command;
    std::swap(mistyped[1], mistyped[2]);
    CHECK(holds(said({mistyped, "agreed.yaml"}, 2), "did you mean " + command + "?"));
  }
  CHECK_FALSE(holds(said({"xylophone"}, 2), "did you mean"));
}

TEST_CASE("every command has help with an example, and is listed") {
  const std::string list = said({"--help"}, 0);
  for (const std::string& command : kCommands) {
    CAPTURE(command);
    CHECK(holds(list, "\n  " + command + " "));
    CHECK(holds(said({command, "--help"}, 0), "Example:\n  agreed " + command));
    CHECK(holds(said({command, "x", "y", "z", "--wrong"}, 2), "see agreed " + command + " --help"));
  }
}

TEST_CASE("token needs a role, by its right name") {
  const Command command = parse({"token", "agreed.yaml", "--role", "operator", "--name", "shift"});
  const TokenCommand* const token = std::get_if<TokenCommand>(&command);
  REQUIRE(token != nullptr);
  CHECK(token->role == Role::operator_);
  CHECK(token->name == "shift");
  CHECK(holds(said({"token", "agreed.yaml"}, 2), "--role is required"));
  CHECK(holds(said({"token", "agreed.yaml", "--role", "operater"}, 2), "did you mean operator?"));
}
