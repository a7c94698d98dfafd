#pragma once
// The body of POST /api/alerts/{id}/acknowledge.
#include <string>

namespace agreed {

struct AcknowledgeBody {
  std::string by;     ///< 1 to 100 bytes
  std::string note;   ///< at most 1000 bytes
  std::string error;  ///< what is wrong with the body; empty when nothing is
};

/// Reads {"by": text, "note": text}; `note` may be left out. Any other field is an error, so that a misspelt
/// note is not lost unseen.
[[nodiscard]] AcknowledgeBody read_acknowledge(const std::string& body);

/// The body that says so; bytes that are not UTF-8 are replaced.
[[nodiscard]] std::string write_acknowledge(const std::string& by, const std::string& note);

}  // namespace agreed
