#pragma once
// The parts of the configuration, each read from its section and checked against those read before it.
#include <filesystem>
#include <optional>
#include <string>
#include <vector>

#include "config/config.hpp"
#include "config/nearest.hpp"
#include "config/problems.hpp"
#include "config/section.hpp"

namespace agreed::settings_file {

/// What has been read so far. Meaningless as soon as there is one error.
struct Draft {
  Config config;
  Settings settings;
  std::vector<std::optional<Section>> chart_methods;  ///< as settings.charts: where a classical one says so
};

// In this order.
void read_analyzers(const Section& top, const std::filesystem::path& folder, Draft& draft);
void read_measurands(const Section& top, Draft& draft);
void read_standards(const Section& top, Draft& draft);
void read_comparisons(const Section& top, Draft& draft);
void read_formats(const Section& top, Draft& draft);
void read_service(const Section& top, const std::filesystem::path& folder, Draft& draft);
void read_alerts(const Section& top, Draft& draft);
void read_routes(const Section& top, const std::filesystem::path& folder, Draft& draft);
/// `judge`: also say what is doubtful about the shares; only when what they follow from is right.
void spend_alarm_budget(const Section& top, bool judge, Draft& draft);

/// Below this an own or shared run length is warned of: false alerts would have to be answered by hand.
inline constexpr double kShortRunLength = 1'000;

/// A path as written to an absolute one.
[[nodiscard]] std::filesystem::path resolved(const std::filesystem::path& folder, const std::string& text);

template <class Item>
[[nodiscard]] std::vector<std::string> ids_of(const std::vector<Item>& items) {
  std::vector<std::string> ids;
  ids.reserve(items.size());
  for (const Item& item : items) ids.push_back(item.id);
  return ids;
}

/// "found 'lien1', expected one of line1, line2; did you mean line1?"
[[nodiscard]] std::string not_one_of(const std::string& found, const std::vector<std::string>& ids);

/// Position of an id in a sorted list of items.
template <class IndexOf, class Item>
[[nodiscard]] std::optional<IndexOf> index_of(const std::vector<Item>& items, const std::string& id) {
  for (std::size_t i = 0; i < items.size(); ++i)
    if (items[i].id == id) return IndexOf{static_cast<std::uint32_t>(i)};
  return std::nullopt;
}

/// The item that a key names; nothing, and an error, when there is no such item; nothing when the key itself
/// is missing or wrong, which was told already.
template <class IndexOf, class Item>
[[nodiscard]] std::optional<IndexOf> reference(const Section& section, const std::string& key,
                                               const std::vector<Item>& items) {
  const auto id = section.text(key);
  if (!id) return std::nullopt;
  const auto found = index_of<IndexOf>(items, *id);
  if (!found) section.error(key, not_one_of(*id, ids_of(items)));
  return found;
}

/// The ids in a list that are among `known`; an error for each of the others.
[[nodiscard]] std::vector<std::string> known_ids(const Section& section, const std::string& key,
                                                 const std::vector<std::string>& known);

}  // namespace agreed::settings_file
