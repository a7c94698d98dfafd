#pragma once
// What a drop file says, row by row, after parsing and before the journal has judged it.
#include <cstdint>
#include <limits>
#include <optional>
#include <string>
#include <vector>

#include "core/base/event.hpp"
#include "core/base/index.hpp"
#include "core/base/instant.hpp"

namespace agreed {

enum class RowKind : std::uint8_t { check, split, intervention, void_ };
enum class Censoring : std::uint8_t { none, below, above };

/// One good row. A row that carries both sides of a pair becomes two of these.
struct Row {
  std::uint32_t line = 0;  ///< in the file, from 1
  RowKind kind = RowKind::check;
  Instant measured_at{};
  AnalyzerIndex analyzer;
  std::optional<MeasurandIndex> measurand;  ///< none only for interventions
  std::string item;                         ///< standard id, sample id, intervention kind
  std::optional<StandardIndex> standard;    ///< of a check (= item), or of an intervention that names one
  std::int32_t replicate = 0;
  double value = 0;  ///< unused for interventions and voids (a void may leave it out)
  Censoring censored = Censoring::none;
  InterventionKind intervention = InterventionKind::noted;
  std::string by, note;  ///< columns operator and note; unknown columns are added to note as "name=value"
  bool clock_ambiguous = false;
};

/// A row that cannot be used, and why.
struct BadRow {
  std::uint32_t line = 0;
  std::uint32_t column = 0;  ///< field number from 1; 0 = the whole row
  std::string text;          ///< as read, at most 500 bytes
  std::string reason;        ///< what was found and what was expected
};

struct FileIdentity {
  AnalyzerIndex analyzer;
  std::string name;  ///< raw bytes, without folder
  std::uint64_t size = 0;
  std::int64_t mtime_ns = 0;
  std::string sha256;  ///< hex of the whole content
  /// When it was last written or renamed, ns since 1970; not known: as if just now.
  std::int64_t status_ns = std::numeric_limits<std::int64_t>::max();
};

/// A piece of one file, about a thousand rows; the last piece of a file says so. If the file as a whole is
/// unusable there is one piece, `unusable` says why and no rows count.
struct FilePiece {
  FileIdentity file;
  std::uint32_t piece = 0;  ///< from 0
  bool last = false;
  std::vector<Row> rows;
  std::vector<BadRow> bad;
  std::string unusable;
  /// Of its watcher; when a piece cannot be committed, none that comes later in its round may be. 0: stands
  /// alone.
  std::uint64_t round = 0;
  bool growing = false;  ///< further lines of a file that stays; `file` describes its bytes up to their end
};

enum class FileOutcome { more, done, repeated, rejected };

/// The engine's answer to one piece, given after COMMIT.
struct PieceAnswer {
  FileOutcome outcome = FileOutcome::more;  ///< more: not the last piece, go on
  Instant committed_at{};
  std::string reason;  ///< for rejected: the text for NAME.reason.txt
};

}  // namespace agreed
