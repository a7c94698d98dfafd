#include "daemon/http/parameters.hpp"

#include <algorithm>
#include <charconv>

#include "core/base/rfc3339.hpp"

namespace agreed {
namespace {

/// "open,resolved" into `states`; what is wrong with it, or nothing.
std::string read_states(std::string_view text, std::vector<std::string>& states) {
  while (true) {
    const auto comma = text.find(',');
    const std::string state(text.substr(0, comma));
    if (state != "open" && state != "acknowledged" && state != "resolved")
      return "state must be a list of open, acknowledged and resolved, separated by commas.";
    states.push_back(state);
    if (comma == std::string_view::npos) return {};
    text.remove_prefix(comma + 1);
  }
}

}  // namespace

std::optional<std::int64_t> whole_number(std::string_view text) {
  std::int64_t number = 0;
  if (text.empty() || text.find_first_not_of("0123456789") != std::string_view::npos) return std::nullopt;
  const auto [end, error] = std::from_chars(text.data(), text.data() + text.size(), number);
  if (error != std::errc() || end != text.data() + text.size()) return std::nullopt;
  return number;
}

Parameter<int> count_parameter(const Target& target, std::string_view name, int most) {
  constexpr int usual = 100;
  const std::string* text = target.parameter(name);
  if (!text) return {usual, ""};
  const auto count = whole_number(*text);
  if (!count || *count < 1 || *count > most)
    return {0, std::string(name) + " must be a whole number from 1 to " + std::to_string(most) + "."};
  return {static_cast<int>(*count), ""};
}

Parameter<AlertQuery> alert_query(const Target& target) {
  Parameter<AlertQuery> query;
  const auto limit = count_parameter(target, "limit");
  query.value.limit = limit.value;
  query.error = limit.error;
  if (const std::string* states = target.parameter("state"); states && query.error.empty())
    query.error = read_states(*states, query.value.states);
  if (const std::string* since = target.parameter("since"); since && query.error.empty()) {
    const auto time = parse_rfc3339(*since);
    if (!time || !time->offset_given)
      query.error = "since must be a time like 2026-01-05T06:00:00Z (write + as %2B).";
    else
      query.value.since = time->at;
  }
  const std::string name = target.parameter("cursor") ? "cursor" : "after";
  if (const std::string* cursor = target.parameter(name); cursor && query.error.empty()) {
    const auto id = whole_number(*cursor);
    if (!id || *id < 1) query.error = name + " must be the value of `next` in an earlier answer.";
    query.value.before_id = id.value_or(0);
  }
  return query;
}

}  // namespace agreed
