#pragma once
// Who is signed in at the page: a random id in a cookie stands for a session kept here, in memory only, so a
// restart signs everybody out. The token itself is in neither; a session ends with the token's line in its
// file.
#include <chrono>
#include <map>
#include <mutex>
#include <optional>
#include <string>
#include <string_view>

#include "daemon/sha256.hpp"

namespace agreed {

struct Session {
  Sha256::Digest token{};  ///< hash of the token it was opened with
  std::string form_key;    ///< what forms of this session carry (anti-forgery)
};

/// Thread-safe.
class Sessions {
 public:
  using Time = std::chrono::steady_clock::time_point;

  /// Beyond `most` sessions the one opened longest ago has to go.
  explicit Sessions(std::size_t most = 256) : most_(most) {}

  /// Opens one until `ends` and returns its id, 64 hexadecimal digits (256 bits); throws std::runtime_error
  /// if the operating system gives no random bytes.
  [[nodiscard]] std::string open(const Sha256::Digest& token, Time ends);

  /// Looked up by the hash of the id: how long it takes says nothing about which ids there are.
  [[nodiscard]] std::optional<Session> find(std::string_view id, Time now);

  void close(std::string_view id);

 private:
  struct Kept {
    Session session;
    Time ends;
    std::uint64_t number = 0;
  };
  void make_room();

  const std::size_t most_;
  std::mutex mutex_;
  std::uint64_t opened_ = 0;
  std::map<Sha256::Digest, Kept> kept_;  ///< by the hash of the id
};

}  // namespace agreed
