#pragma once
// The command line as a value: parsing never exits and never prints.
#include <filesystem>
#include <optional>
#include <span>
#include <string>
#include <variant>
#include <vector>

#include "core/base/finding.hpp"
#include "daemon/http/tokens.hpp"
#include "daemon/journal/journal_types.hpp"

namespace agreed {

struct RunCommand {
  std::filesystem::path config;
};
struct CheckCommand {
  std::filesystem::path config;
  std::filesystem::path sample;  ///< empty: none
  std::string analyzer;          ///< whose file the sample is
  bool json = false;
};
struct ExampleCommand {
  std::filesystem::path folder;
};
struct VerifyCommand {
  std::filesystem::path config;
  std::vector<ChainHead> heads;               ///< noted elsewhere; must still be in the chain
  std::optional<std::filesystem::path> file;  ///< instead of the journal in the state folder
  bool json = false;
};
struct BackupCommand {
  std::filesystem::path config, file;
  bool json = false;
};
struct RestoreCommand {
  std::filesystem::path config, file;
  bool json = false;
};
struct ReportCommand {
  std::filesystem::path config, out;
  Instant from{};
  std::optional<Instant> to;  ///< none: now
  bool json = false;
};
struct TokenCommand {
  std::filesystem::path config;
  Role role = Role::reader;
  std::string name;  ///< empty: one is made of the role
  bool json = false;
};
struct SendTestCommand {
  std::filesystem::path config;
  std::string route;  ///< empty: every one
  bool json = false;
};
struct ResendCommand {
  std::filesystem::path config;
  std::string message;               ///< its webhook-id
  std::filesystem::path token_file;  ///< empty: AGREED_TOKEN; likewise below
  std::string url;                   ///< empty: where the configuration says the service listens
  bool json = false;
};
struct StatusCommand {
  std::string target;  ///< a configuration file, or the URL of a service
  std::filesystem::path token_file;
  bool json = false;
};
struct ReplayCommand {
  std::filesystem::path config;
  std::filesystem::path from;     ///< a journal or a folder; empty: the configuration's own journal
  std::optional<Period> between;  ///< alerts opened from `first` on and before `last`
  bool json = false;
};
/// "NAME=SD": the sd of one reading of a measurand, on one analyzer or on every one.
struct GivenSd {
  std::string analyzer;  ///< empty: every one
  std::string measurand;
  double sd = 0;  ///< in the measurand's unit, > 0
};
struct PlanCommand {
  std::filesystem::path config;
  std::vector<GivenSd> sds;
  std::optional<double> false_alerts_per_year;  ///< a wish, > 0
  std::optional<double> notice;    ///< a wish: a shift of this size, > 0, in the measurand's unit
  std::optional<Duration> within;  ///< ... is noticed within this, > 0
  std::string measurand;           ///< ... of this; empty: the only one there is
  int trials = 1'000;              ///< simulated for each figure
  bool json = false;
};
/// Nothing to do but print `text` (on standard error if `code` is not 0) and end.
struct Say {
  int code = 0;
  std::string text;
};

using Command = std::variant<RunCommand, CheckCommand, ExampleCommand, VerifyCommand, BackupCommand,
                             RestoreCommand, ReportCommand, TokenCommand, SendTestCommand, ResendCommand,
                             StatusCommand, ReplayCommand, PlanCommand, Say>;

/// `arguments` without the program's name.
[[nodiscard]] Command parse_command_line(std::span<const std::string> arguments);

}  // namespace agreed
