#include "config/config.hpp"

namespace agreed {

std::string to_string(const ConfigProblem& problem, const std::filesystem::path& file) {
  std::string text = file.string();
  if (problem.line > 0) text += ':' + std::to_string(problem.line) + ':' + std::to_string(problem.column);
  text += ": ";
  if (problem.warning) text += "warning: ";
  if (!problem.key.empty()) text += problem.key + ": ";
  return text + problem.message;
}

}  // namespace agreed
