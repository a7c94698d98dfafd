#pragma once
// The small parts every JSON renderer shares. Included by the renderers' sources only, because it brings in
// the whole JSON library.
#include <cmath>
#include <optional>
#include <string>
#include <type_traits>
#include <utility>
#include <variant>

#include <nlohmann/json.hpp>

#include "core/base/finding.hpp"
#include "core/base/instant.hpp"
#include "core/base/rfc3339.hpp"

namespace agreed {

/// Keeps the fields in the order they are written.
using Json = nlohmann::ordered_json;

/// A number, or null: no answer ever holds NaN or an infinity.
[[nodiscard]] inline Json json_number(double value) {
  return std::isfinite(value) ? Json(value) : Json(nullptr);
}
[[nodiscard]] inline Json json_number(const std::optional<double>& value) {
  return value ? json_number(*value) : Json(nullptr);
}

[[nodiscard]] inline Json json_time(const std::optional<Instant>& at) {
  return at ? Json(to_rfc3339(*at)) : Json(nullptr);
}

/// Text, or null when there is none.
[[nodiscard]] inline Json json_words(const std::string& text) {
  return text.empty() ? Json(nullptr) : Json(text);
}

[[nodiscard]] inline Json json_period(const std::optional<Period>& period) {
  return period ? Json::array({to_rfc3339(period->first), to_rfc3339(period->last)}) : Json(nullptr);
}

/// The text of `json`; bytes that are not UTF-8 become the replacement character instead of an exception.
[[nodiscard]] inline std::string json_text(const Json& json) {
  return json.dump(-1, ' ', false, Json::error_handler_t::replace);
}

/// One page of a list as every list is told: {"NAME":[..],"next":..}.
template <class Rows, class Tell>
[[nodiscard]] std::string json_page(const char* name, const Rows& rows, const Tell& tell,
                                    const std::optional<std::string>& next) {
  Json list = Json::array();
  for (const auto& row : rows) list.push_back(tell(row));
  Json page = Json::object();
  page[name] = std::move(list);
  page["next"] = next ? Json(*next) : Json(nullptr);
  return json_text(page);
}

/// The parts a subject has.
[[nodiscard]] inline Json json_subject(const Subject& subject) {
  Json json = Json::object();
  for (const auto& [name, id] :
       {std::pair("analyzer", &subject.analyzer), std::pair("standard", &subject.standard),
        std::pair("measurand", &subject.measurand), std::pair("comparison", &subject.comparison),
        std::pair("service", &subject.service)})
    if (!id->empty()) json[name] = *id;
  return json;
}

[[nodiscard]] inline Json json_details(const Details& details) {
  Json json = Json::object();
  for (const auto& [name, detail] : details)
    json[name] = std::visit(
        [](const auto& value) {
          if constexpr (std::is_same_v<std::decay_t<decltype(value)>, double>)
            return json_number(value);
          else
            return Json(value);
        },
        detail);
  return json;
}

}  // namespace agreed
