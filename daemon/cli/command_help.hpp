#pragma once
// What the command line can say of itself: the commands as they are read, for the manual page.
#include <string>
#include <vector>

namespace agreed {

struct ArgumentHelp {
  std::string name;   ///< "CONFIG", or of an option "--json"
  std::string value;  ///< what an option takes: "FILE"; empty: nothing
  std::string what;
  bool is_option = false;
  bool is_required = false;
};

struct CommandHelp {
  std::string name;  ///< of the program itself: "agreed"
  std::string what;
  std::vector<ArgumentHelp> arguments;
  std::string more;  ///< as --help ends: prose, then "Example:" and lines indented by two
};

/// The program itself, then each of its commands, from the very tree that parse_command_line reads by.
[[nodiscard]] std::vector<CommandHelp> command_help();

}  // namespace agreed
