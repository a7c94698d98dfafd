#pragma once
// Query parameters read into values; what is wrong with one is told in words.
#include <cstdint>
#include <optional>
#include <string>
#include <string_view>

#include "daemon/http/target.hpp"
#include "daemon/journal/journal.hpp"

namespace agreed {

/// A value, or why there is none.
template <class Value>
struct Parameter {
  Value value{};
  std::string error;
};

/// A whole number written with digits only; nothing for anything else or beyond 2^63 - 1.
[[nodiscard]] std::optional<std::int64_t> whole_number(std::string_view text);

/// How many points, pairs or rows: 1 to `most`, 100 when the parameter is absent.
[[nodiscard]] Parameter<int> count_parameter(const Target& target, std::string_view name, int most = 500);

/// state, since, limit and after (also called cursor) of /api/alerts.
[[nodiscard]] Parameter<AlertQuery> alert_query(const Target& target);

}  // namespace agreed
