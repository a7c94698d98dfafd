#pragma once
// The status in one screen of a terminal. Pure: /api/status in, text out.
#include <string>

#include "core/base/instant.hpp"

namespace agreed {

/// What the service answered, and how it is to be shown.
struct StatusAnswers {
  std::string status;  ///< /api/status
  std::string alerts;  ///< /api/alerts?state=open,acknowledged; empty: not known, only their number is shown
  std::string url;     ///< where it was asked
};

struct StatusText {
  bool everything_agrees = false;  ///< "overall" is "ok"
  std::string text;  ///< lines of at most 80 columns; nothing in it controls a terminal but colour
};

/// Ages are counted from `now`. With `colour`, ANSI colours besides the words, never instead of them. What is
/// missing in the answers is left out; throws std::invalid_argument if they are no status at all.
[[nodiscard]] StatusText status_text(const StatusAnswers& answers, Instant now, bool colour);

}  // namespace agreed
