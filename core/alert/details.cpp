#include "core/alert/details.hpp"

#include <algorithm>
#include <cmath>

namespace agreed {
namespace {

template <class Value>
const Value* find_value(const Details& details, std::string_view name) {
  const auto found =
      std::find_if(details.begin(), details.end(), [&](const auto& entry) { return entry.first == name; });
  return found == details.end() ? nullptr : std::get_if<Value>(&found->second);
}

}  // namespace

std::optional<double> number_in(const Details& details, std::string_view name) {
  const auto* value = find_value<double>(details, name);
  if (value == nullptr || !std::isfinite(*value)) return std::nullopt;
  return *value;
}

std::optional<std::string> text_in(const Details& details, std::string_view name) {
  const auto* value = find_value<std::string>(details, name);
  if (value == nullptr || value->empty()) return std::nullopt;
  return *value;
}

std::vector<std::string> list_in(const Details& details, std::string_view name) {
  const auto* value = find_value<std::vector<std::string>>(details, name);
  return value == nullptr ? std::vector<std::string>{} : *value;
}

void set_detail(Details& details, std::string_view name, Detail value) {
  const auto found =
      std::find_if(details.begin(), details.end(), [&](const auto& entry) { return entry.first == name; });
  if (found == details.end())
    details.emplace_back(name, std::move(value));
  else
    found->second = std::move(value);
}

}  // namespace agreed
