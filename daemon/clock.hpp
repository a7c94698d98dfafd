#pragma once
// The one place where the service asks what time it is.
#include "core/base/instant.hpp"

namespace agreed {

[[nodiscard]] inline Instant now_utc() {
  return std::chrono::floor<Duration>(std::chrono::system_clock::now());
}

}  // namespace agreed
