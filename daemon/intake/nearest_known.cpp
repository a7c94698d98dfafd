#include "daemon/intake/nearest_known.hpp"

#include <algorithm>
#include <numeric>
#include <utility>

namespace agreed {
namespace {

constexpr std::size_t kLongestName = 64;  // of a configured id
constexpr std::size_t kMostShown = 10;

/// Levenshtein distance, row by row.
std::size_t edit_distance(std::string_view a, std::string_view b) {
  std::vector<std::size_t> row(b.size() + 1);
  std::iota(row.begin(), row.end(), std::size_t{0});
  for (std::size_t i = 0; i < a.size(); ++i) {
    std::size_t diagonal = std::exchange(row[0], i + 1);
    for (std::size_t j = 0; j < b.size(); ++j) {
      const std::size_t replaced = diagonal + (a[i] == b[j] ? 0 : 1);
      diagonal = row[j + 1];
      row[j + 1] = std::min({replaced, row[j] + 1, diagonal + 1});
    }
  }
  return row.back();
}

}  // namespace

std::string known_hint(std::string_view name, const std::vector<std::string_view>& known) {
  if (known.empty()) return "none is known";
  std::string_view best;
  std::size_t best_distance = 3;
  if (name.size() <= kLongestName + 2) {
    for (const std::string_view candidate : known) {
      const std::size_t distance = edit_distance(name, candidate);
      if (distance >= best_distance || 2 * distance >= candidate.size()) continue;
      best = candidate;
      best_distance = distance;
    }
  }
  if (!best.empty()) return "did you mean \"" + std::string(best) + "\"?";
  std::string hint = "known are: ";
  for (std::size_t i = 0; i < std::min(known.size(), kMostShown); ++i)
    hint.append(i == 0 ? "" : ", ").append(known[i]);
  return known.size() > kMostShown ? hint + ", ..." : hint;
}

}  // namespace agreed
