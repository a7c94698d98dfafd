#include "config/nearest.hpp"

#include <algorithm>

#include "core/base/ascii.hpp"

namespace agreed::settings_file {
namespace {

constexpr std::size_t kLongestCompared = 80;  // no name is longer; bounds the work on garbage

bool begins(std::string_view longer, std::string_view shorter) {
  constexpr std::size_t kTellingLength = 3;
  return shorter.size() >= kTellingLength && longer.substr(0, shorter.size()) == shorter;
}

}  // namespace

std::size_t edit_distance(std::string_view a, std::string_view b) {
  std::vector<std::size_t> before_last(b.size() + 1), last(b.size() + 1), current(b.size() + 1);
  for (std::size_t j = 0; j <= b.size(); ++j) last[j] = j;
  for (std::size_t i = 1; i <= a.size(); ++i) {
    current[0] = i;
    for (std::size_t j = 1; j <= b.size(); ++j) {
      const bool same = ascii::lower(a[i - 1]) == ascii::lower(b[j - 1]);
      current[j] = std::min({last[j] + 1, current[j - 1] + 1, last[j - 1] + (same ? 0U : 1U)});
      const bool exchanged = i > 1 && j > 1 && ascii::lower(a[i - 1]) == ascii::lower(b[j - 2]) &&
                             ascii::lower(a[i - 2]) == ascii::lower(b[j - 1]);
      if (exchanged) current[j] = std::min(current[j], before_last[j - 2] + 1);
    }
    before_last.swap(last);
    last.swap(current);
  }
  return last[b.size()];
}

std::optional<std::string> nearest(std::string_view name, const std::vector<std::string>& names) {
  if (name.empty() || name.size() > kLongestCompared) return std::nullopt;
  std::optional<std::string> best;
  std::size_t least = std::max<std::size_t>(1, name.size() / 3) + 1;
  for (const std::string& candidate : names) {
    const std::size_t distance = edit_distance(name, candidate);
    if (distance < least) {
      least = distance;
      best = candidate;
    }
  }
  if (best) return best;
  for (const std::string& candidate : names)
    if (begins(name, candidate) || begins(candidate, name)) return candidate;
  return std::nullopt;
}

std::string did_you_mean(std::string_view name, const std::vector<std::string>& names) {
  const auto meant = nearest(name, names);
  return meant ? "; did you mean " + *meant + "?" : "";
}

std::string enumerated(const std::vector<std::string>& names) {
  constexpr std::size_t kMost = 12;
  if (names.empty()) return "(none)";
  std::string text;
  for (std::size_t i = 0; i < std::min(names.size(), kMost); ++i) text += (i > 0 ? ", " : "") + names[i];
  if (names.size() > kMost) text += " and " + std::to_string(names.size() - kMost) + " more";
  return text;
}

}  // namespace agreed::settings_file
