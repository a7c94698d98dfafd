#include "config/problems.hpp"

#include <algorithm>
#include <tuple>
#include <utility>

namespace agreed::settings_file {

namespace {
constexpr std::size_t kMostShown = 500;
}

void Problems::error(Position at, std::string key, std::string message) {
  list_.push_back({at.line, at.column, std::move(key), std::move(message), false});
  ++errors_;
}

void Problems::warning(Position at, std::string key, std::string message) {
  list_.push_back({at.line, at.column, std::move(key), std::move(message), true});
}

std::vector<ConfigProblem> Problems::sorted() const {
  std::vector<ConfigProblem> all = list_;
  std::stable_sort(all.begin(), all.end(), [](const ConfigProblem& a, const ConfigProblem& b) {
    return std::tie(a.line, a.column) < std::tie(b.line, b.column);
  });
  if (all.size() <= kMostShown) return all;
  // Errors before warnings, so that cutting the list never hides that there are errors.
  std::stable_partition(all.begin(), all.end(), [](const ConfigProblem& p) { return !p.warning; });
  const std::size_t more = all.size() - kMostShown;
  const bool only_warnings = all[kMostShown].warning;
  all.resize(kMostShown);
  all.push_back({0, 0, "", "and " + std::to_string(more) + " more", only_warnings});
  return all;
}

}  // namespace agreed::settings_file
