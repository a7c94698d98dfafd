#include "daemon/cli/command_line.hpp"

#include <algorithm>
#include <vector>

#include <CLI/CLI.hpp>

#include "config/nearest.hpp"
#include "daemon/exit_codes.hpp"
#include "daemon/version.hpp"

namespace agreed {
namespace {

/// The names of the subcommands, for the nearest one to a mistyped word.
std::vector<std::string> names_of(const CLI::App& app) {
  std::vector<std::string> names;
  for (const CLI::App* command : app.get_subcommands({})) names.push_back(command->get_name());
  return names;
}

std::string unknown_command(const CLI::App& app, const std::string& word) {
  std::string text = "agreed: there is no command '" + word + "'";
  text += settings_file::did_you_mean(word, names_of(app));
  return text + "\nagreed --help lists them\n";
}

}  // namespace

Command parse_command_line(std::span<const std::string> arguments) {
  CLI::App app{
      "agreed keeps two production analyzers, whose results are used as one, true to each other:\n"
      "it watches their drop folders, charts their check standards, fits their split samples\n"
      "and calls out when they stop agreeing.",
      "agreed"};
  app.set_version_flag("--version", std::string("agreed ") + version());
  app.require_subcommand(1);
  app.footer(
      "Example:\n  agreed example mill && agreed check mill/agreed.yaml && agreed run mill/agreed.yaml\n\n"
      "Exit status: 0 done, 1 the answer is no, 2 wrong use or configuration, 3 could not do it.");

  RunCommand run;
  CLI::App* run_app = app.add_subcommand("run", "the service, in the foreground; SIGTERM or Ctrl-C ends it");
  run_app->add_option("CONFIG", run.config, "the configuration file")->required();
  run_app->footer("Example:\n  agreed run /etc/agreed/agreed.yaml");

  CheckCommand check;
  CLI::App* check_app = app.add_subcommand(
      "check",
      "validates a configuration and shows the values in effect, or how a sample file would be read");
  check_app->add_option("CONFIG", check.config, "the configuration file")->required();
  check_app->add_flag("--json", check.json, "print for programs");
  CLI::Option* sample =
      check_app->add_option("--sample", check.sample, "show how this file would be read, row by row");
  CLI::Option* analyzer =
      check_app->add_option("--analyzer", check.analyzer, "whose file the sample is: an id of analyzers");
  sample->needs(analyzer);
  analyzer->needs(sample);
  check_app->footer(
      "Example:\n  agreed check /etc/agreed/agreed.yaml\n"
      "  agreed check /etc/agreed/agreed.yaml --sample export.csv --analyzer line2\n\n"
      "With --sample nothing is taken in; exit status 1 if a row could not be used.");

  ExampleCommand example;
  CLI::App* example_app = app.add_subcommand(
      "example", "writes a complete working configuration and a day's drop files to start from");
  example_app->add_option("DIR", example.folder, "a folder that does not exist yet, or is empty")->required();
  example_app->footer("Example:\n  agreed example mill");

  if (!arguments.empty() && !arguments.front().starts_with('-')) {
    const auto names = names_of(app);
    if (std::find(names.begin(), names.end(), arguments.front()) == names.end())
      return Say{kWrongUse, unknown_command(app, arguments.front())};
  }
  try {
    app.parse(std::vector<std::string>(arguments.rbegin(), arguments.rend()));  // CLI11 wants them reversed
  } catch (const CLI::CallForVersion& call) {
    return Say{kDone, std::string(call.what()) + '\n'};
  } catch (const CLI::CallForHelp&) {
    return Say{kDone, app.help()};
  } catch (const CLI::ParseError& error) {
    const auto used = app.get_subcommands();
    const std::string help =
        used.empty() ? "agreed --help" : "agreed " + used.front()->get_name() + " --help";
    return Say{kWrongUse, std::string("agreed: ") + error.what() + "\nsee " + help + '\n'};
  }
  if (run_app->parsed()) return run;
  if (check_app->parsed()) return check;
  return example;
}

}  // namespace agreed
