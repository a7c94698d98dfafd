#include "daemon/cli/time_argument.hpp"

#include <string>

#include "core/base/rfc3339.hpp"

namespace agreed {

std::optional<Instant> time_argument(std::string_view text) {
  constexpr std::size_t kDate = 10;  // 2026-01-31
  const auto parsed =
      parse_rfc3339(text.size() == kDate ? std::string(text) + "T00:00:00Z" : std::string(text));
  if (!parsed || !parsed->offset_given) return std::nullopt;
  return parsed->at;
}

}  // namespace agreed
