#include "daemon/http/tokens.hpp"

#include <cerrno>
#include <cstring>
#include <fstream>
#include <sstream>
#include <system_error>

#include <openssl/crypto.h>
#include <sys/stat.h>

namespace agreed {
namespace {

using Hash = Sha256::Digest;

std::optional<Hash> hash_from_hex(const std::string& hex) {
  Hash hash{};
  if (hex.size() != 2 * hash.size() || hex.find_first_not_of("0123456789abcdefABCDEF") != std::string::npos)
    return std::nullopt;
  for (std::size_t i = 0; i < hash.size(); ++i)
    hash[i] = static_cast<unsigned char>(std::stoul(hex.substr(2 * i, 2), nullptr, 16));
  return hash;
}

std::int64_t nanoseconds(const timespec& time) {
  return static_cast<std::int64_t>(time.tv_sec) * 1'000'000'000 + time.tv_nsec;
}

}  // namespace

Tokens::Tokens(std::optional<std::filesystem::path> file, std::function<void(const std::string&)> tell)
    : file_(std::move(file)), tell_(std::move(tell)) {}

void Tokens::use(std::optional<std::filesystem::path> file) {
  const std::scoped_lock lock(mutex_);
  if (file == file_) return;
  file_ = std::move(file);
  read_once_ = false;
  entries_.clear();
}

std::optional<Role> Tokens::role_of(std::string_view token) {
  const auto holder = holder_of(sha256(token));
  return holder ? std::optional(holder->role) : std::nullopt;
}

std::optional<TokenHolder> Tokens::holder_of(const Sha256::Digest& hash) {
  const std::scoped_lock lock(mutex_);
  read_if_changed();
  const Entry* found = nullptr;
  for (const Entry& entry : entries_)  // all of them, found or not: no early exit to time
    if (CRYPTO_memcmp(entry.sha256.data(), hash.data(), hash.size()) == 0) {
      if (!found || entry.holder.role == Role::operator_) found = &entry;
    }
  return found ? std::optional(found->holder) : std::nullopt;
}

bool Tokens::any() {
  const std::scoped_lock lock(mutex_);
  read_if_changed();
  return !entries_.empty();
}

void Tokens::read_if_changed() {
  if (!file_) return;
  struct stat status {};
  std::optional<Stamp> stamp;
  if (::stat(file_->c_str(), &status) == 0)
    stamp = Stamp{nanoseconds(status.st_mtim), nanoseconds(status.st_ctim),
                  static_cast<std::uint64_t>(status.st_size), static_cast<std::uint64_t>(status.st_ino)};
  if (read_once_ && stamp == stamp_) return;
  read_once_ = true;
  stamp_ = stamp;
  read_file();
}

void Tokens::read_file() {
  entries_.clear();
  std::ifstream in(*file_);
  if (!in) {
    tell_("tokens file " + file_->string() + " cannot be read (" + std::generic_category().message(errno) +
          "): no token is accepted until it can be");
    return;
  }
  std::string line;
  for (std::size_t number = 1; std::getline(in, line); ++number)
    if (const auto entry = entry_of(line, number)) entries_.push_back(*entry);
}

std::optional<Tokens::Entry> Tokens::entry_of(const std::string& line, std::size_t number) const {
  std::istringstream words(line);
  std::string role, name, hex, more;
  words >> role;
  if (role.empty() || role.front() == '#') return std::nullopt;
  words >> name >> hex >> more;
  const auto hash = hash_from_hex(hex);
  if ((role == "reader" || role == "operator") && hash && more.empty())
    return Entry{{role == "operator" ? Role::operator_ : Role::reader, name}, *hash};
  // Not the line itself: someone may have put a token there.
  tell_("tokens file " + file_->string() + ":" + std::to_string(number) +
        ": expected `reader|operator NAME SHA256` (64 hexadecimal digits); the line is passed over");
  return std::nullopt;
}

}  // namespace agreed
