#include "daemon/http/sessions.hpp"

#include <algorithm>
#include <array>
#include <stdexcept>

#include <openssl/rand.h>

#include "daemon/hex.hpp"

namespace agreed {
namespace {

std::string random_hex() {
  std::array<unsigned char, 32> bytes{};
  if (RAND_bytes(bytes.data(), static_cast<int>(bytes.size())) != 1)
    throw std::runtime_error("the operating system gives no random bytes");
  return to_hex(bytes);
}

}  // namespace

std::string Sessions::open(const Sha256::Digest& token, Time ends) {
  std::string id = random_hex();
  Kept kept{{token, random_hex()}, ends, 0};
  const std::scoped_lock lock(mutex_);
  make_room();
  kept.number = ++opened_;
  kept_.insert_or_assign(sha256(id), std::move(kept));
  return id;
}

std::optional<Session> Sessions::find(std::string_view id, Time now) {
  const std::scoped_lock lock(mutex_);
  const auto found = kept_.find(sha256(id));
  if (found == kept_.end()) return std::nullopt;
  if (now < found->second.ends) return found->second.session;
  kept_.erase(found);
  return std::nullopt;
}

void Sessions::close(std::string_view id) {
  const std::scoped_lock lock(mutex_);
  kept_.erase(sha256(id));
}

void Sessions::make_room() {
  while (kept_.size() >= most_ && !kept_.empty())
    kept_.erase(std::min_element(kept_.begin(), kept_.end(), [](const auto& a, const auto& b) {
      return a.second.number < b.second.number;
    }));
}

}  // namespace agreed
