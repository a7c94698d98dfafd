#pragma once
// SHA-256, of text in memory or of a stream. The functions throw std::runtime_error if OpenSSL fails.
#include <array>
#include <memory>
#include <string>
#include <string_view>

namespace agreed {

/// A stream hashed as it comes; one object can hash many streams, one after the other.
class Sha256 {
 public:
  using Digest = std::array<unsigned char, 32>;

  Sha256();
  ~Sha256();
  Sha256(const Sha256&) = delete;
  Sha256& operator=(const Sha256&) = delete;

  /// Forgets what came: a new stream begins.
  void start_over();
  void update(std::string_view bytes);
  /// The hash of all bytes so far, in lower-case hex; the stream goes on.
  [[nodiscard]] std::string hex_so_far() const;
  /// The hash of all bytes since the construction, start_over() or digest(); a new stream begins.
  [[nodiscard]] Digest digest();
  /// The same in lower-case hex.
  [[nodiscard]] std::string hex();

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

[[nodiscard]] Sha256::Digest sha256(std::string_view text);
/// In lower-case hex.
[[nodiscard]] std::string sha256_hex(std::string_view text);

}  // namespace agreed
