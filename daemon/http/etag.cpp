#include "daemon/http/etag.hpp"

#include <array>
#include <stdexcept>

#include <openssl/evp.h>

namespace agreed {

std::string sha256_hex(std::string_view bytes) {
  std::array<unsigned char, EVP_MAX_MD_SIZE> digest{};
  unsigned int length = 0;
  if (EVP_Digest(bytes.data(), bytes.size(), digest.data(), &length, EVP_sha256(), nullptr) != 1)
    throw std::runtime_error("SHA-256 cannot be computed: the OpenSSL library refuses it");
  constexpr std::string_view digits = "0123456789abcdef";
  std::string hex;
  for (unsigned int i = 0; i < length; ++i) {
    hex.push_back(digits[digest[i] >> 4U]);
    hex.push_back(digits[digest[i] & 15U]);
  }
  return hex;
}

std::string etag_of(std::string_view body) {
  return '"' + sha256_hex(body).substr(0, 32) + '"';
}

bool etag_matches(std::string_view sent, std::string_view etag) {
  const auto first = sent.find_first_not_of(" \t");
  if (first == std::string_view::npos || etag.empty()) return false;
  if (sent.substr(first, sent.find_last_not_of(" \t") - first + 1) == "*") return true;
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
