#pragma once
// The configuration as the service uses it: validated, every default filled in, every path absolute.
#include <filesystem>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "config/file_mode.hpp"
#include "config/mapped_format.hpp"
#include "core/alert/alert_book.hpp"
#include "core/base/finding.hpp"
#include "core/base/settings.hpp"

namespace agreed {

enum class BadRowPolicy { keep_good, reject_file };

/// How one analyzer's drop folder is read; index = AnalyzerIndex.
struct IntakeSettings {
  std::string analyzer;
  std::filesystem::path inbox;
  std::string format = "plain";
  std::shared_ptr<const MappedFormat> mapped;  ///< what `format` names; null: plain
  std::string zone = "UTC";
  Instant not_before{};
  Duration settle = std::chrono::seconds(2);
  Duration rescan = std::chrono::seconds(15);
  FileMode mode = FileMode::whole;
  BadRowPolicy on_bad_row = BadRowPolicy::keep_good;  ///< always keep_good for growing files
};

struct Listen {
  std::string address = "127.0.0.1";
  int port = 7480;  ///< 0: any free one
  bool open_to_network = false;
  bool behind_proxy = false;  ///< a reverse proxy brings others here, whatever the address
};

/// Where an endpoint's signing secrets come from: `secret_file` (up to two lines) or `secret_env` (up to two
/// words), or neither with `unsigned: true`.
struct Route {
  std::string name;
  std::string url;
  std::optional<std::filesystem::path> secret_file;
  std::optional<std::string> secret_env;
  bool unsigned_ = false;
  std::optional<std::filesystem::path> ca_file;
  std::vector<AlertKind> kinds;  ///< empty: all; likewise below
  std::vector<std::string> analyzers, measurands, comparisons;
  Severity at_least = Severity::notice;
  std::optional<Duration> heartbeat;
  std::optional<Duration> unacknowledged_for;
};

struct Config {
  std::filesystem::path file;
  std::string text;  ///< as read
  std::shared_ptr<const Settings> settings;
  std::filesystem::path state;
  std::optional<double> least_free_mb;  ///< less room than this where the state lies is told
  Listen listen;
  std::optional<std::string> page_url;  ///< where people open the page; none: made of the address listened on
  std::vector<IntakeSettings> intake;
  std::vector<Route> routes;
  AlertPolicy alert_policy;
  std::optional<std::filesystem::path> tokens_file;
};

/// One thing wrong (or, `warning`, doubtful) in the configuration. Lines and columns count from 1; 0 = the
/// whole file.
struct ConfigProblem {
  int line = 0, column = 0;
  std::string key;      ///< "analyzers.line1.inbox"
  std::string message;  ///< what was found, what was expected, the nearest right name
  bool warning = false;
};

/// "FILE:LINE:COLUMN: KEY: MESSAGE".
[[nodiscard]] std::string to_string(const ConfigProblem& problem, const std::filesystem::path& file);

/// Either a configuration, or at least one problem that is not a warning.
struct ConfigResult {
  std::optional<Config> config;
  std::vector<ConfigProblem> problems;
};

/// Reads and validates; never throws for anything that is in, or wrong with, the file.
[[nodiscard]] ConfigResult read_config(const std::filesystem::path& file);
/// The same from text; `file` only for messages and relative paths.
[[nodiscard]] ConfigResult parse_config(std::string text, const std::filesystem::path& file);

}  // namespace agreed
