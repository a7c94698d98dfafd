#include "daemon/sha256.hpp"

#include <stdexcept>

#include <openssl/evp.h>

#include "daemon/hex.hpp"

namespace agreed {
namespace {

void require(bool done) {
  if (!done) throw std::runtime_error("OpenSSL could not compute SHA-256");
}

struct Free {
  void operator()(EVP_MD_CTX* context) const { EVP_MD_CTX_free(context); }
  void operator()(EVP_MD* algorithm) const { EVP_MD_free(algorithm); }
};

}  // namespace

// OpenSSL 3 looks an algorithm up by name at each use unless it was fetched.
struct Sha256::Impl {
  std::unique_ptr<EVP_MD_CTX, Free> context{EVP_MD_CTX_new()};
  std::unique_ptr<EVP_MD, Free> algorithm{EVP_MD_fetch(nullptr, "SHA256", nullptr)};
};

Sha256::Sha256() : impl_(std::make_unique<Impl>()) {
  require(impl_->context != nullptr && impl_->algorithm != nullptr);
  start_over();
}

Sha256::~Sha256() = default;

void Sha256::start_over() {
  require(EVP_DigestInit_ex(impl_->context.get(), impl_->algorithm.get(), nullptr) == 1);
}

void Sha256::update(std::string_view bytes) {
  require(EVP_DigestUpdate(impl_->context.get(), bytes.data(), bytes.size()) == 1);
}

Sha256::Digest Sha256::digest() {
  Digest digest{};
  require(EVP_DigestFinal_ex(impl_->context.get(), digest.data(), nullptr) == 1);
  start_over();
  return digest;
}

std::string Sha256::hex_so_far() const {
  const std::unique_ptr<EVP_MD_CTX, Free> copy(EVP_MD_CTX_new());
  Digest digest{};
  require(copy != nullptr && EVP_MD_CTX_copy_ex(copy.get(), impl_->context.get()) == 1 &&
          EVP_DigestFinal_ex(copy.get(), digest.data(), nullptr) == 1);
  return to_hex(digest);
}

std::string Sha256::hex() {
  return to_hex(digest());
}

Sha256::Digest sha256(std::string_view text) {
  Sha256 hash;
  hash.update(text);
  return hash.digest();
}

std::string sha256_hex(std::string_view text) {
  return to_hex(sha256(text));
}

}  // namespace agreed
