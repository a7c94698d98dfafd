#include "core/alert/collected.hpp"

#include <algorithm>
#include <array>
#include <string>
#include <vector>

#include "core/alert/details.hpp"

namespace agreed {
namespace {

/// The names this happening adds: its list, or its single entry.
std::vector<std::string> entries_of(AlertKind kind, const Details& details) {
  auto entries = list_in(details, collected_list(kind));
  if (!entries.empty()) return entries;
  // A conflict or a lonely half is about a split sample as often as about a check standard.
  const std::array<const char*, 2> names = kind == AlertKind::file_rejected  ? std::array{"file", "name"}
                                           : kind == AlertKind::pair_outlier ? std::array{"sample", "item"}
                                                                             : std::array{"item", "sample"};
  for (const char* name : names)
    if (const auto entry = text_in(details, name)) return {*entry};
  return {};
}

}  // namespace

bool resolves_on_acknowledgement(AlertKind kind) {
  return *collected_list(kind) != '\0';
}

const char* collected_list(AlertKind kind) {
  switch (kind) {
    case AlertKind::pair_outlier:
      return "samples";
    case AlertKind::file_rejected:
      return "files";
    case AlertKind::readings_conflict:
    case AlertKind::unpaired_samples:
      return "items";
    default:
      return "";
  }
}

Details collect(AlertKind kind, const Details& before, const Details& newest) {
  const char* list_name = collected_list(kind);
  auto list = list_in(before, list_name);
  const auto entries = entries_of(kind, newest);
  for (const auto& entry : entries) {
    list.erase(std::remove(list.begin(), list.end(), entry), list.end());
    list.push_back(entry);
  }
  if (list.size() > kMostCollected)
    list.erase(list.begin(), list.end() - static_cast<std::ptrdiff_t>(kMostCollected));
  const double happened =
      number_in(newest, "count").value_or(static_cast<double>(std::max<std::size_t>(entries.size(), 1)));

  Details after = newest;
  set_detail(after, list_name, std::move(list));
  set_detail(after, "count", number_in(before, "count").value_or(0.0) + happened);
  return after;
}

}  // namespace agreed
