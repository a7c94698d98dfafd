#include "daemon/webhook/signature.hpp"

#include <algorithm>
#include <array>
#include <stdexcept>

#include <openssl/evp.h>
#include <openssl/hmac.h>

namespace agreed {
namespace {

constexpr std::string_view kPrefix = "whsec_";

const unsigned char* bytes_of(std::string_view text) {
  return reinterpret_cast<const unsigned char*>(text.data());
}

std::string base64(std::span<const unsigned char> bytes) {
  std::string text(4 * ((bytes.size() + 2) / 3) + 1, '\0');  // one more for the terminating zero
  const int length = EVP_EncodeBlock(reinterpret_cast<unsigned char*>(text.data()), bytes.data(),
                                     static_cast<int>(bytes.size()));
  text.resize(static_cast<std::size_t>(length));
  return text;
}

bool is_base64(std::string_view text) {
  const auto padding = text.find('=');
  const std::string_view digits = text.substr(0, padding);
  const bool padded_well =
      padding == std::string_view::npos ||
      (text.size() - padding <= 2 && text.find_first_not_of('=', padding) == std::string_view::npos);
  return !digits.empty() && text.size() % 4 == 0 && padded_well &&
         digits.find_first_not_of("ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/") ==
             std::string_view::npos;
}

std::string from_base64(std::string_view text) {
  if (!is_base64(text))
    throw std::invalid_argument("a secret that begins with whsec_ is not base64 after it");
  std::string bytes(text.size() / 4 * 3, '\0');
  EVP_DecodeBlock(reinterpret_cast<unsigned char*>(bytes.data()), bytes_of(text),
                  static_cast<int>(text.size()));
  // OpenSSL counts the padding as bytes.
  bytes.resize(bytes.size() - static_cast<std::size_t>(std::count(text.begin(), text.end(), '=')));
  return bytes;
}

std::string hmac_sha256(const SigningKey& key, std::string_view text) {
  std::array<unsigned char, EVP_MAX_MD_SIZE> digest{};
  unsigned int length = 0;
  if (HMAC(EVP_sha256(), key.bytes.data(), static_cast<int>(key.bytes.size()), bytes_of(text), text.size(),
           digest.data(), &length) == nullptr)
    throw std::runtime_error("OpenSSL could not compute HMAC-SHA256");
  return base64(std::span(digest).first(length));
}

}  // namespace

SigningKey signing_key(std::string_view secret) {
  if (secret.empty()) throw std::invalid_argument("a secret is empty");
  if (secret.substr(0, kPrefix.size()) != kPrefix) return {std::string(secret)};
  return {from_base64(secret.substr(kPrefix.size()))};
}

std::string webhook_signature(std::string_view webhook_id, Instant timestamp, std::string_view body,
                              std::span<const SigningKey> keys) {
  if (webhook_id.empty() || webhook_id.find('.') != std::string_view::npos)
    throw std::invalid_argument("webhook id must not be empty nor hold a full stop");
  std::string signed_text(webhook_id);
  signed_text.append(".").append(webhook_timestamp(timestamp)).append(".").append(body);
  std::string header;
  for (const auto& key : keys) {
    if (!header.empty()) header += ' ';
    header += "v1,";
    header += hmac_sha256(key, signed_text);
  }
  return header;
}

std::string webhook_timestamp(Instant timestamp) {
  return std::to_string(std::chrono::floor<std::chrono::seconds>(timestamp).time_since_epoch().count());
}

}  // namespace agreed
