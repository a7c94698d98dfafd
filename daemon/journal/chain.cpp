#include "daemon/journal/chain.hpp"

#include <array>
#include <bit>
#include <charconv>
#include <stdexcept>

#include <openssl/evp.h>

namespace agreed::journal {
namespace {

constexpr std::size_t kFlushAt = 32 * 1024;

void require(int ok) {
  if (ok != 1) throw std::runtime_error("SHA-256 of OpenSSL failed");
}

void append_number(std::string& to, std::int64_t value) {
  std::array<char, 20> digits{};
  const auto end = std::to_chars(digits.data(), digits.data() + digits.size(), value).ptr;
  to.append(digits.data(), end);
}

}  // namespace

struct BatchText::Digest {
  Digest() : context(EVP_MD_CTX_new()), algorithm(EVP_MD_fetch(nullptr, "SHA256", nullptr)) {}
  ~Digest() {
    EVP_MD_free(algorithm);
    EVP_MD_CTX_free(context);
  }
  Digest(const Digest&) = delete;
  Digest& operator=(const Digest&) = delete;

  EVP_MD_CTX* context;
  EVP_MD* algorithm;
};

BatchText::BatchText() : digest_(std::make_unique<Digest>()) {
  buffer_.reserve(2 * kFlushAt);
}
BatchText::~BatchText() = default;

void BatchText::begin(std::int64_t sequence, std::string_view previous, Instant committed_at) {
  require(EVP_DigestInit_ex(digest_->context, digest_->algorithm, nullptr));
  buffer_.clear();
  begin_row("batch");
  integer(sequence);
  text(previous);
  integer(committed_at.time_since_epoch().count());
  end_row();
}

void BatchText::begin_row(std::string_view table) {
  row_start_ = buffer_.size();
  buffer_.append(table);
}

void BatchText::integer(std::int64_t value) {
  buffer_.push_back('\t');
  append_number(buffer_, value);
}

// The bits and not digits: exact, and the same in every language.
void BatchText::real(double value) {
  std::array<char, 16> digits{};
  const auto bits = std::bit_cast<std::uint64_t>(value);
  const auto end = std::to_chars(digits.data(), digits.data() + digits.size(), bits, 16).ptr;
  buffer_.push_back('\t');
  buffer_.append(digits.data(), end);
}

void BatchText::text(std::string_view value) {
  buffer_.push_back('\t');
  for (std::size_t at = 0; at < value.size();) {
    const std::size_t special = std::min(value.find_first_of("\\\t\n", at), value.size());
    buffer_.append(value, at, special - at);
    if (special == value.size()) break;
    buffer_.push_back('\\');
    buffer_.push_back(value[special] == '\t' ? 't' : value[special] == '\n' ? 'n' : '\\');
    at = special + 1;
  }
}

void BatchText::end_row() {
  buffer_.push_back('\n');
  if (buffer_.size() >= kFlushAt) flush();
}

void BatchText::flush() {
  require(EVP_DigestUpdate(digest_->context, buffer_.data(), buffer_.size()));
  buffer_.clear();
}

std::string BatchText::finish() {
  flush();
  std::array<unsigned char, EVP_MAX_MD_SIZE> hash{};
  unsigned length = 0;
  require(EVP_DigestFinal_ex(digest_->context, hash.data(), &length));
  std::string hex;
  for (unsigned i = 0; i < length; ++i) {
    constexpr std::string_view kDigits = "0123456789abcdef";
    hex.push_back(kDigits[hash[i] >> 4U]);
    hex.push_back(kDigits[hash[i] & 15U]);
  }
  return hex;
}

std::string chain_start(std::string_view source, Instant created_at) {
  BatchText start;
  start.begin(0, source, created_at);
  return start.finish();
}

}  // namespace agreed::journal
