#include "daemon/intake/file_names.hpp"

#include <algorithm>
#include <array>

#include "daemon/intake/text.hpp"

namespace agreed {

bool is_ignored_name(std::string_view name) {
  constexpr std::array<std::string_view, 3> kEnds = {".tmp", ".part", ".filepart"};
  if (name.starts_with('.') || name.starts_with("~$") || name.ends_with('~')) return true;
  return std::any_of(kEnds.begin(), kEnds.end(),
                     [name](std::string_view end) { return ends_with_word(name, end); });
}

}  // namespace agreed
