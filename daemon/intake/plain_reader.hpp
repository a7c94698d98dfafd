#pragma once
// Reads a file of the plain or of a mapped format as a stream: bytes in, rows and bad rows out, in bounded
// memory.
#include <memory>
#include <string>
#include <string_view>

#include "daemon/intake/row_format.hpp"
#include "daemon/intake/row_maker.hpp"

namespace agreed {

enum class PlainSyntax { csv, json_lines, json_array };

/// By the end of the name: .jsonl, .json, all else is CSV.
[[nodiscard]] PlainSyntax plain_syntax_of(std::string_view file_name);

/// The file is one JSON array, by its format, or in the plain format by its name.
[[nodiscard]] bool is_json_array(const PlainContext& context, std::string_view file_name);

class PlainReader {
 public:
  /// `syntax` is that of the plain format; a mapped one says its own. `taker` and the context's settings must
  /// outlive the reader. It may throw: what it throws passes through.
  PlainReader(PlainContext context, PlainSyntax syntax, RowTaker& taker);
  PlainReader(const PlainReader&) = delete;
  PlainReader& operator=(const PlainReader&) = delete;

  /// Takes the next bytes, cut anywhere; false once the file is known to be unusable.
  bool feed(std::string_view block);
  /// The file ends here for now, after a line end; more may be fed later.
  void pause();
  /// From now on rows are judged as of `now` (PlainContext::now).
  void set_now(Instant now) {
    context_.now = now;
    maker_.set_now(now);
  }
  /// The end of the file. `closed`: its writer is known to have finished, so a last line without line end
  /// counts; else that line is a bad row.
  void finish(bool closed);
  /// Why the file as a whole cannot be read; empty if it can. Never set once a row was given out.
  [[nodiscard]] const std::string& unusable() const { return format_->unusable(); }

 private:
  PlainContext context_;
  RowMaker maker_;
  std::unique_ptr<RowFormat> format_;
};

}  // namespace agreed
