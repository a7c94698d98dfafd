#include "daemon/http/media_type.hpp"

#include <optional>

#include "core/base/ascii.hpp"

namespace agreed {
namespace {

/// "0.8" in thousandths; what cannot be read counts as 1.
int quality(std::string_view text) {
  int thousandths = 0, place = 1000;
  for (const char c : text) {
    if (c == '.') continue;
    if (!ascii::is_digit(c) || place == 0) return 1000;
    thousandths += (c - '0') * place;
    place /= 10;
  }
  return text.empty() || thousandths > 1000 ? 1000 : thousandths;
}

/// The part of `list` before `separator`; cuts both off.
std::string_view cut(std::string_view& list, char separator) {
  const auto end = list.find(separator);
  const std::string_view part = list.substr(0, end);
  list.remove_prefix(end == std::string_view::npos ? list.size() : end + 1);
  return ascii::trimmed(part);
}

int quality_of(std::string_view parameters) {
  while (!parameters.empty()) {
    std::string_view value = cut(parameters, ';');
    const std::string_view name = cut(value, '=');
    if (ascii::same_letters(name, "q")) return quality(ascii::trimmed(value));
  }
  return 1000;
}

}  // namespace

bool prefers_csv(std::string_view accept) {
  std::optional<int> csv, json;
  bool csv_first = false;
  while (!accept.empty()) {
    std::string_view range = cut(accept, ',');
    const std::string_view type = cut(range, ';');
    if (ascii::same_letters(type, "text/csv") && !csv) {
      csv = quality_of(range);
      csv_first = !json;
    }
    if (ascii::same_letters(type, "application/json") && !json) json = quality_of(range);
  }
  if (!csv || *csv == 0) return false;
  return !json || *csv > *json || (*csv == *json && csv_first);
}

}  // namespace agreed
