#include "daemon/http/etag.hpp"

#include "daemon/sha256.hpp"

namespace agreed {

std::string etag_of(std::string_view body) {
  return '"' + sha256_hex(body).substr(0, 32) + '"';
}

bool etag_matches(std::string_view sent, std::string_view etag) {
  const auto first = sent.find_first_not_of(" \t");
  if (first == std::string_view::npos || etag.empty()) return false;
  if (sent.substr(first, sent.find_last_not_of(" \t") - first + 1) == "*") return true;
  if (etag.starts_with("W/")) etag.remove_prefix(2);
  // Our tags hold no comma and no quote, so the quoted text may simply be looked for, piece by piece.
  for (auto open = sent.find('"'); open != std::string_view::npos;) {
    const auto close = sent.find('"', open + 1);
    if (close == std::string_view::npos) return false;
    if (sent.substr(open, close - open + 1) == etag) return true;
    open = sent.find('"', close + 1);
  }
  return false;
}

}  // namespace agreed
