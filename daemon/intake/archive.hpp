#pragma once
// Where files go once they are committed: done/YYYY-MM-DD/ or rejected/ in the inbox. Nothing is overwritten.
#include <string>

#include "core/base/instant.hpp"

namespace agreed {

struct Archived {
  std::string folder;  ///< "done/2026-01-05", relative to the inbox
  std::string name;    ///< the name it has there
};

/// Moves `name` from the inbox (a descriptor) to done/, by the UTC day of `committed_at`; of a name that
/// is taken "results.csv" becomes "results.2.csv" and so on. Throws std::system_error; the file is then still
/// where it was.
Archived move_to_done(int inbox, const std::string& name, Instant committed_at);

/// Moves `name` to rejected/ and writes `reason` to NAME.reason.txt beside it; both get the same number.
Archived move_to_rejected(int inbox, const std::string& name, const std::string& reason);

}  // namespace agreed
