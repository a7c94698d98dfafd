#include "daemon/http/tokens.hpp"

#include <algorithm>
#include <fstream>
#include <sstream>
#include <utility>

#include <openssl/crypto.h>
#include <sys/stat.h>

#include "config/unreadable.hpp"
#include "core/base/ascii.hpp"

namespace agreed {
namespace {

using Hash = Sha256::Digest;

constexpr std::size_t kMostTold = 20;  ///< lines of no use: a wrong file must not fill the log

std::optional<Hash> hash_from_hex(const std::string& hex) {
  Hash hash{};
  if (hex.size() != 2 * hash.size() || hex.find_first_not_of("0123456789abcdefABCDEF") != std::string::npos)
    return std::nullopt;
  for (std::size_t i = 0; i < hash.size(); ++i)
    hash[i] = static_cast<unsigned char>(std::stoul(hex.substr(2 * i, 2), nullptr, 16));
  return hash;
}

bool is_empty_or_remark(const std::string& line) {
  const std::string_view text = ascii::trimmed(line, " \t\r\v\f");
  return text.empty() || text.front() == '#';
}

std::int64_t nanoseconds(const timespec& time) {
  return static_cast<std::int64_t>(time.tv_sec) * 1'000'000'000 + time.tv_nsec;
}

}  // namespace

Tokens::Tokens(std::optional<std::filesystem::path> file, Tell tell, Tell tell_over)
    : file_(std::move(file)), tell_(std::move(tell)), tell_over_(std::move(tell_over)) {}

void Tokens::use(std::optional<std::filesystem::path> file) {
  const std::scoped_lock lock(mutex_);
  const bool same = file == file_;
  const Content before = std::exchange(content_, {});
  file_ = std::move(file);
  read_once_ = false;
  read_if_changed();
  if (same) tell_what_is_over(before);
}

std::string Tokens::trouble() {
  const std::scoped_lock lock(mutex_);
  read_if_changed();
  const auto& faults = content_.faults;
  if (faults.empty()) return {};
  return faults.front() +
         (faults.size() > 1 ? " (and " + std::to_string(faults.size() - 1) + " more, see the log)" : "");
}

std::optional<Role> Tokens::role_of(std::string_view token) {
  const auto holder = holder_of(sha256(token));
  return holder ? std::optional(holder->role) : std::nullopt;
}

std::optional<TokenHolder> Tokens::holder_of(const Sha256::Digest& hash) {
  const std::scoped_lock lock(mutex_);
  read_if_changed();
  const Entry* found = nullptr;
  for (const Entry& entry : content_.entries)  // all of them, found or not: no early exit to time
    if (CRYPTO_memcmp(entry.sha256.data(), hash.data(), hash.size()) == 0) {
      if (!found || entry.holder.role == Role::operator_) found = &entry;
    }
  return found ? std::optional(found->holder) : std::nullopt;
}

bool Tokens::any() {
  const std::scoped_lock lock(mutex_);
  read_if_changed();
  return !content_.entries.empty();
}

void Tokens::read_if_changed() {
  if (!file_) return;
  struct stat status {};
  std::optional<Stamp> stamp;
  if (::stat(file_->c_str(), &status) == 0)
    stamp = Stamp{nanoseconds(status.st_mtim), nanoseconds(status.st_ctim),
                  static_cast<std::uint64_t>(status.st_size), static_cast<std::uint64_t>(status.st_ino)};
  // What could not be read is tried again: what hindered it need not have been the file.
  if (read_once_ && content_.readable && stamp == stamp_) return;
  read_once_ = true;
  stamp_ = stamp;
  const Content before = std::exchange(content_, read_file());
  for (const std::string& fault : content_.faults)
    if (std::find(before.faults.begin(), before.faults.end(), fault) == before.faults.end()) tell_(fault);
  tell_what_is_over(before);
}

void Tokens::tell_what_is_over(const Content& before) const {
  if (!file_ || !tell_over_) return;
  if (!before.readable && content_.readable)
    tell_over_("the tokens file " + file_->string() + " can be read again");
  else if (!before.faults.empty() && content_.faults.empty())
    tell_over_("every line of the tokens file " + file_->string() + " can be used again");
}

Tokens::Content Tokens::read_file() const {
  const auto unreadable = [](const std::string& why) {
    return Content{{},
                   false,
                   {"the tokens file cannot be used: " + why +
                    "; no token is accepted until it can, everything else goes on"}};
  };
  if (const std::string why = why_unreadable(*file_); !why.empty()) return unreadable(why);
  Content content;
  std::ifstream in(*file_);
  std::string line;
  std::size_t untold = 0;
  for (std::size_t number = 1; std::getline(in, line); ++number) {
    if (is_empty_or_remark(line)) continue;
    if (auto entry = entry_of(line))
      content.entries.push_back(std::move(*entry));
    else if (content.faults.size() == kMostTold)
      ++untold;
    else  // Not the line itself: someone may have put a token there.
      content.faults.push_back(
          "tokens file " + file_->string() + ":" + std::to_string(number) +
          ": expected `reader|operator NAME SHA256` (64 hexadecimal digits); the line is passed over");
  }
  if (untold > 0)
    content.faults.push_back("tokens file " + file_->string() + ": " + std::to_string(untold) +
                             " further lines are passed over");
  if (!in.is_open() || in.bad()) return unreadable(file_->string() + " could not be read to its end");
  return content;
}

std::optional<Tokens::Entry> Tokens::entry_of(const std::string& line) {
  std::istringstream words(line);
  std::string role, name, hex, more;
  words >> role >> name >> hex >> more;
  const auto hash = hash_from_hex(hex);
  if ((role != "reader" && role != "operator") || !hash || !more.empty()) return std::nullopt;
  return Entry{{role == "operator" ? Role::operator_ : Role::reader, name}, *hash};
}

}  // namespace agreed
