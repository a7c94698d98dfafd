#include "daemon/intake/file_names.hpp"

#include <algorithm>
#include <array>
#include <string>

#include <fnmatch.h>

#include "daemon/intake/text.hpp"

namespace agreed {

bool is_ignored_name(std::string_view name) {
  constexpr std::array<std::string_view, 3> kEnds = {".tmp", ".part", ".filepart"};
  if (name.starts_with('.') || name.starts_with("~$") || name.ends_with('~')) return true;
  return std::any_of(kEnds.begin(), kEnds.end(),
                     [name](std::string_view end) { return ends_with_word(name, end); });
}

bool is_wanted_name(const FileNames& names, std::string_view name) {
  const std::string text(name);
  const auto fits = [&text](const std::string& pattern) {
    return fnmatch(pattern.c_str(), text.c_str(), FNM_NOESCAPE | FNM_CASEFOLD) == 0;
  };
  return fits(names.take) && std::none_of(names.ignore.begin(), names.ignore.end(), fits);
}

}  // namespace agreed
