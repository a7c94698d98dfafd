#include "daemon/intake/nearest_known.hpp"

#include <algorithm>

#include "config/nearest.hpp"

namespace agreed {
namespace {

constexpr std::size_t kMostNamesShown = 10;

}  // namespace

std::string known_hint(std::string_view name, const std::vector<std::string_view>& known) {
  if (known.empty()) return "none is known";
  const std::vector<std::string> names(known.begin(), known.end());
  if (const auto meant = settings_file::nearest(name, names)) return "did you mean \"" + *meant + "\"?";
  std::string hint = "there are: ";
  for (std::size_t i = 0; i < std::min(known.size(), kMostNamesShown); ++i)
    hint.append(i == 0 ? "" : ", ").append(known[i]);
  return known.size() > kMostNamesShown ? hint + ", ..." : hint;
}

}  // namespace agreed
