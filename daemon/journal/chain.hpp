#pragma once
// The canonical text of history rows and the SHA-256 over it that links each batch to the one before.
// README.md documents the text; it never changes within a schema version. Private to daemon/journal.
#include <cstdint>
#include <string>
#include <string_view>

#include "core/base/instant.hpp"
#include "daemon/sha256.hpp"

namespace agreed::journal {

/// One batch's text, hashed as it grows so that a batch of any size needs little memory.
class BatchText {
 public:
  BatchText();

  /// Starts over with the head line of the batch.
  void begin(std::int64_t sequence, std::string_view previous, Instant committed_at);

  void begin_row(std::string_view table);
  void integer(std::int64_t value);
  void real(double value);
  void text(std::string_view value);
  void absent() { buffer_.push_back('\t'); }
  void end_row();
  /// Forgets the row that was begun.
  void drop_row() { buffer_.resize(row_start_); }

  /// SHA-256 of everything since begin(), in hex.
  [[nodiscard]] std::string finish();

 private:
  void flush();

  Sha256 hash_;
  std::string buffer_;
  std::size_t row_start_ = 0;
};

/// What the first batch names as the one before it: it binds the chain to this journal.
[[nodiscard]] std::string chain_start(std::string_view source, Instant created_at);

}  // namespace agreed::journal
