#include "daemon/intake/plain_columns.hpp"

#include <algorithm>
#include <set>

#include "daemon/intake/nearest_known.hpp"
#include "daemon/intake/text.hpp"
#include "daemon/printable.hpp"

namespace agreed {
namespace {

// In the order of the enumeration.
constexpr std::array<std::string_view, kPlainColumns> kNames = {
    "kind", "measured_at", "measurand", "item", "value", "replicate", "operator",
    "note", "analyzer",    "standard",  "x",    "y",     "comparison"};

std::string name_fault(const std::vector<std::string>& names) {
  if (names.size() > kMostColumns)
    return "the header has " + std::to_string(names.size()) + " columns; at most " +
           std::to_string(kMostColumns) + " are read";
  std::set<std::string_view> seen;
  for (std::size_t i = 0; i < names.size(); ++i) {
    const std::string where = "column " + std::to_string(i + 1) + " of the header ";
    if (names[i].empty()) return where + "has no name";
    if (names[i].size() > kMostTextBytes || !is_clean_text(names[i]))
      return where + "is " + in_quotes(names[i]) + ": a name of at most 200 bytes of UTF-8 text was expected";
    if (!seen.insert(names[i]).second) return where + "repeats the name " + in_quotes(names[i]);
  }
  return {};
}

std::string missing(std::string_view column, const std::vector<std::string>& names) {
  const std::vector<std::string_view> present(names.begin(), names.end());
  return "the header has no column \"" + std::string(column) + "\"; " + known_hint(column, present);
}

/// Separators that other programs use, if the header looks like one of theirs.
std::string separator_hint(const std::vector<std::string>& names) {
  if (names.size() != 1) return {};
  for (const char separator : {';', '\t', '|'})
    if (std::count(names[0].begin(), names[0].end(), separator) >= 3)
      return separator == '\t' ? " (fields seem to be separated by tabs; the plain format uses commas)"
                               : std::string(" (fields seem to be separated by '") + separator +
                                     "'; the plain format uses commas)";
  return {};
}

}  // namespace

std::string_view name_of(PlainColumn column) {
  return kNames[static_cast<std::size_t>(column)];
}

std::optional<PlainColumn> plain_column(std::string_view name) {
  const auto found = std::find(kNames.begin(), kNames.end(), name);
  if (found == kNames.end()) return std::nullopt;
  return static_cast<PlainColumn>(found - kNames.begin());
}

std::string_view RawRow::name(PlainColumn column) const {
  const auto at = static_cast<std::size_t>(column);
  return own != nullptr && !own->names[at].empty() ? own->names[at] : name_of(column);
}

std::string_view RawRow::written(PlainColumn column) const {
  const auto at = static_cast<std::size_t>(column);
  return own != nullptr && !own->names[at].empty() ? own->written[at] : fields[at].text;
}

BadRow bad_row(std::uint32_t line, std::uint32_t column, std::string_view whole, std::string reason) {
  return {line, column, std::string(whole.substr(0, kMostQuotedBytes)), std::move(reason)};
}

std::string header_fault(const std::vector<std::string>& names) {
  const std::string separators = separator_hint(names);
  if (!separators.empty()) return missing("kind", names) + separators;
  if (std::string fault = name_fault(names); !fault.empty()) return fault;
  const auto has = [&](PlainColumn column) {
    return std::find(names.begin(), names.end(), name_of(column)) != names.end();
  };
  using enum PlainColumn;
  for (const PlainColumn needed : {kind, measured_at, measurand, item})
    if (!has(needed)) return missing(name_of(needed), names);
  const bool all_sides = has(x) && has(y) && has(comparison);
  if (!has(value) && !all_sides) return missing("value", names) + " (or the columns x, y and comparison)";
  return {};
}

}  // namespace agreed
