#pragma once
// One export that its analyzer keeps appending to: read on from where it was left, whole lines only.
#include <cstdint>
#include <functional>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "daemon/intake/file_content.hpp"
#include "daemon/intake/file_reader.hpp"
#include "daemon/intake/plain_reader.hpp"
#include "daemon/intake/sink.hpp"
#include "daemon/sha256.hpp"

namespace agreed {

class LineEnd;

/// Remembers how many bytes of a file were taken and what they were. A portion that is read counts as taken
/// at once: when it could not be committed, throw this object away and place a new one. What stands before is
/// recognised in full up to 1 MiB, beyond that by its first and last 512 KiB; place() always looks at all of
/// it.
class GrowingFile {
 public:
  /// The context's settings must outlive the file.
  GrowingFile(PlainContext context, PlainSyntax syntax, const ReadLimits& limits);
  ~GrowingFile();
  GrowingFile(const GrowingFile&) = delete;
  GrowingFile& operator=(const GrowingFile&) = delete;

  /// Goes to the end of the longest of `known` that the content begins with, else to its start. Throws
  /// std::system_error.
  void place(const FileContent& content, const std::vector<TakenPortion>& known);
  /// The same without looking: it is known to be as it was left.
  void place_at(const TakenPortion& portion);
  /// Whether the content still begins with what was taken of it.
  [[nodiscard]] bool begins_as_taken(const FileContent& content) const;

  /// The next lines that are complete, about a thousand; nothing if there is none, or if the file as a whole
  /// cannot be read and that was said before.
  [[nodiscard]] std::optional<FilePiece> read_on(const FileContent& content, const std::string& name,
                                                 Instant now);
  /// The bytes taken.
  [[nodiscard]] std::uint64_t taken() const { return taken_; }
  /// Hex, of the bytes taken.
  [[nodiscard]] const std::string& sha256() const { return sha256_; }
  /// What stands behind the last line taken, as a bad row that says that its line end is missing.
  [[nodiscard]] BadRow unfinished_line(const FileContent& content) const;

 private:
  struct Collected;

  void begin_reader(const FileContent& content);
  [[nodiscard]] bool feed_lines(const FileContent& content, const LineEnd& line_end);
  void feed(std::string_view bytes);
  void remember(const FileContent& content);
  void forget_all();

  PlainContext context_;
  PlainSyntax syntax_;
  ReadLimits limits_;
  std::uint64_t taken_ = 0;
  std::string sha256_;  ///< of the bytes taken
  std::string fingerprint_;
  bool unusable_ = false;  ///< and that was said
  Sha256 hash_;            ///< of what the reader was fed
  std::unique_ptr<Collected> rows_;
  std::unique_ptr<PlainReader> reader_;  ///< stands behind the bytes taken; made when it is needed
};

}  // namespace agreed
