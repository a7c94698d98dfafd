#include "config/config.hpp"

#include <exception>
#include <fstream>
#include <utility>

#include "config/parts.hpp"
#include "config/unreadable.hpp"
#include "config/validate.hpp"
#include "config/yaml_tree.hpp"

namespace agreed {
namespace {
using namespace settings_file;
namespace fs = std::filesystem;

constexpr std::size_t kLargestFile = 4U << 20U;

ConfigResult failed(std::string message) {
  return {std::nullopt, {{0, 0, "", std::move(message), false}}};
}

/// A complete draft; whether it counts is for `problems` to say.
Draft read_all(const TreeNode& root, const fs::path& file, Problems& problems) {
  Draft draft;
  const Section top = Section::top(root, problems);
  const fs::path folder = file.parent_path();
  read_analyzers(top, folder, draft);
  read_measurands(top, draft);
  read_standards(top, draft);
  read_comparisons(top, draft);
  read_formats(top, draft);
  read_service(top, folder, draft);
  read_alerts(top, draft);
  read_routes(top, folder, draft);
  spend_alarm_budget(top, !problems.any_error(), draft);
  return draft;
}

ConfigResult parse(std::string text, const fs::path& file) {
  Problems problems;
  const auto root = parse_yaml(text, problems);
  if (!root) return {std::nullopt, problems.sorted()};
  validate(*root, problems);
  if (root->kind != NodeKind::map) return {std::nullopt, problems.sorted()};
  Draft draft = read_all(*root, fs::absolute(file), problems);
  ConfigResult result{std::nullopt, problems.sorted()};
  if (problems.any_error()) return result;
  draft.config.file = fs::absolute(file);
  draft.config.text = std::move(text);
  draft.config.settings = std::make_shared<const Settings>(std::move(draft.settings));
  result.config = std::move(draft.config);
  return result;
}

}  // namespace

std::string to_string(const ConfigProblem& problem, const std::filesystem::path& file) {
  std::string text = file.string();
  if (problem.line > 0) text += ':' + std::to_string(problem.line) + ':' + std::to_string(problem.column);
  text += ": ";
  if (problem.warning) text += "warning: ";
  if (!problem.key.empty()) text += problem.key + ": ";
  return text + problem.message;
}

ConfigResult parse_config(std::string text, const std::filesystem::path& file) {
  try {
    return parse(std::move(text), file);
  } catch (const std::exception& error) {
    return failed(std::string("could not be read: ") + error.what());
  }
}

ConfigResult read_config(const std::filesystem::path& file) {
  std::error_code error;
  if (!fs::exists(file, error) && !error)
    return failed("there is no such file; expected a configuration in YAML");
  if (fs::is_directory(file, error)) return failed("found a folder, expected a configuration file in YAML");
  std::ifstream stream(file, std::ios::binary);
  if (!stream) return failed(why_unreadable(file) + "; expected a file that this user may read");
  std::string text(kLargestFile + 1, '\0');
  stream.read(text.data(), static_cast<std::streamsize>(text.size()));
  if (stream.bad()) return failed("could not be read to its end");
  text.resize(static_cast<std::size_t>(stream.gcount()));
  if (text.size() > kLargestFile) return failed("found more than 4 MiB, expected a configuration in YAML");
  return parse_config(std::move(text), file);
}

}  // namespace agreed
