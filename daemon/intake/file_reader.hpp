#pragma once
// One settled file to the pieces the engine takes.
#include <cstdint>
#include <functional>
#include <stop_token>
#include <string>

#include "config/config.hpp"
#include "daemon/intake/file_content.hpp"
#include "daemon/intake/plain_reader.hpp"
#include "daemon/intake/row.hpp"

namespace agreed {

struct ReadLimits {
  std::uint64_t file_bytes = 1ULL << 30U;
  std::size_t piece_rows =
      1'000;  ///< good and bad ones; small, so that the engine can take analyzers in step
  std::size_t piece_bytes = 8ULL << 20U;  ///< of texts, about
};

enum class ReadOutcome {
  given,    ///< every piece, the last included
  changed,  ///< the file was written to meanwhile: read it again later; the last piece was not given
  given_up  ///< `give` said so
};

/// What one reading of a file needs to know.
struct ReadTask {
  std::string name;     ///< raw bytes, without folder
  bool closed = false;  ///< its writer is known to have finished
  BadRowPolicy on_bad_row = BadRowPolicy::keep_good;
  ReadLimits limits;
  std::stop_token stop;
};

/// Gives the file piece by piece to `give` until that returns false. An unusable file is one piece that says
/// why. The hash is taken in a first pass (which also parses for BadRowPolicy::reject_file); what the second
/// pass read must have the same, else the file changed. Throws std::system_error when reading fails.
[[nodiscard]] ReadOutcome read_file(const FileContent& content, const ReadTask& task,
                                    const PlainContext& context,
                                    const std::function<bool(FilePiece&&)>& give);

/// The piece for a thing that is no regular file.
[[nodiscard]] FilePiece unreadable_piece(AnalyzerIndex analyzer, const std::string& name, std::string why);

}  // namespace agreed
