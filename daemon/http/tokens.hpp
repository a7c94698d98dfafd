#pragma once
// Bearer tokens: a file of lines `role name sha256` holds their hashes, never the tokens themselves. It is
// read again when it changes.
#include <filesystem>
#include <functional>
#include <mutex>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "daemon/sha256.hpp"

namespace agreed {

enum class Role { reader, operator_ };

/// Whose token it is.
struct TokenHolder {
  Role role{};
  std::string name;
};

class Tokens {
 public:
  /// No file: no token is known. `tell` gets a message per line that cannot be used, or when the file cannot
  /// be read (then no token is known until it can); called at each reading of the file.
  Tokens(std::optional<std::filesystem::path> file, std::function<void(const std::string&)> tell);

  /// Another file from now on.
  void use(std::optional<std::filesystem::path> file);

  /// The role of a token; nothing if it is not known. The time it takes does not depend on which token comes
  /// near.
  [[nodiscard]] std::optional<Role> role_of(std::string_view token);

  /// The same by its hash, with the name its line has; for who keeps a hash and asks again whether it still
  /// stands in the file.
  [[nodiscard]] std::optional<TokenHolder> holder_of(const Sha256::Digest& hash);

  /// Whether any token, of either role, may read.
  [[nodiscard]] bool any();

 private:
  struct Entry {
    TokenHolder holder;
    Sha256::Digest sha256;
  };
  struct Stamp {
    std::int64_t modified_ns = 0, changed_ns = 0;
    std::uint64_t size = 0, inode = 0;
    bool operator==(const Stamp&) const = default;
  };

  void read_if_changed();
  void read_file();
  [[nodiscard]] std::optional<Entry> entry_of(const std::string& line, std::size_t number) const;

  std::optional<std::filesystem::path> file_;
  const std::function<void(const std::string&)> tell_;
  std::mutex mutex_;
  std::optional<Stamp> stamp_;
  bool read_once_ = false;
  std::vector<Entry> entries_;
};

}  // namespace agreed
