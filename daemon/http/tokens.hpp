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
  using Tell = std::function<void(const std::string&)>;

  /// No file: no token is known. The file is looked at whenever a token or `trouble` is asked for. `tell`
  /// gets a message per line that cannot be used, or when the file cannot be read (then no token is known
  /// until it can), once until that changes; `tell_over` gets one when it is over.
  Tokens(std::optional<std::filesystem::path> file, Tell tell, Tell tell_over = {});

  /// This file from now on. It is read at once, and what is wrong with it is told, even if it was before.
  void use(std::optional<std::filesystem::path> file);

  /// What is wrong with the file, the first of it; empty: nothing.
  [[nodiscard]] std::string trouble();

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

  /// What one reading of the file gave.
  struct Content {
    std::vector<Entry> entries;
    bool readable = true;
    std::vector<std::string> faults;  ///< in words
  };

  void read_if_changed();
  [[nodiscard]] Content read_file() const;
  [[nodiscard]] static std::optional<Entry> entry_of(const std::string& line);
  void tell_what_is_over(const Content& before) const;

  std::optional<std::filesystem::path> file_;
  const Tell tell_, tell_over_;
  std::mutex mutex_;
  std::optional<Stamp> stamp_;
  bool read_once_ = false;
  Content content_;
};

}  // namespace agreed
