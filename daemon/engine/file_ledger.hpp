#pragma once
// Takes the pieces of drop files into the journal and says what became of each file.
#include <map>
#include <memory>
#include <set>
#include <stdexcept>
#include <string>
#include <tuple>
#include <utility>
#include <vector>

#include "core/base/event.hpp"
#include "core/base/finding.hpp"
#include "core/base/settings.hpp"
#include "core/monitor/monitor.hpp"
#include "daemon/intake/row.hpp"
#include "daemon/journal/journal.hpp"

namespace agreed {

/// A piece that cannot follow what is known of its file: an earlier one was not committed. The file must be
/// read again.
class PieceOutOfOrder : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

/// What came of the pieces of one batch.
struct TakenIn {
  std::vector<Event> events;             ///< new readings and interventions
  std::vector<Finding> findings;         ///< what a person must know of the files
  std::vector<CheckReading> censored;    ///< new ones that only say "below" or "above"
  std::vector<CheckReading> taken_back;  ///< whose check standards a void concerned
};

/// An intervention as it stands in the journal.
struct KeptIntervention {
  JournalIntervention stored;
  bool is_new = false;  ///< else one was known under its key, and stands
};

class FileLedger {
 public:
  explicit FileLedger(std::shared_ptr<const Settings> settings) : settings_(std::move(settings)) {}

  /// Writes one piece within the open batch and adds what came of it to `taken`; the monitor hears what was
  /// taken back. Throws JournalError and PieceOutOfOrder.
  PieceAnswer take(const FilePiece& piece, Instant now, Journal& journal, Monitor& monitor, TakenIn& taken);

  /// Writes an intervention that came by no file within the open batch, with the same effect on `taken` as
  /// from a file. Throws JournalError.
  [[nodiscard]] KeptIntervention take_told(const Row& row, Journal& journal, TakenIn& taken) const;

  /// Forgets every file that was begun and not finished (after a failed batch).
  void forget() { open_.clear(); }

 private:
  struct OpenFile {
    std::int64_t id = 0;
    std::uint32_t next_piece = 0;
    std::int64_t good = 0, rejected = 0;
    std::string first_reason;  ///< of the first rejected row
    std::uint32_t first_line = 0, first_column = 0;
    std::string reasons;    ///< for NAME.reason.txt, the first thousand
    bool repeated = false;  ///< its content is known: its rows are passed over
    bool finished = false;  ///< it was taken in whole before, and not moved
    bool news = false;      ///< a row was rejected that was not before
    std::multiset<std::pair<std::uint32_t, std::uint32_t>>
        rejected_before;  ///< rows an interrupted reading of it rejected, line and column
  };
  using Key = std::tuple<AnalyzerIndex, std::string, std::string>;  ///< analyzer, name, content

  struct Hands {
    Journal& journal;
    Monitor& monitor;
    TakenIn& taken;
    Instant now;
  };
  [[nodiscard]] OpenFile begin(const FilePiece& piece, Journal& journal) const;
  void take_row(const Row& row, OpenFile& file, const Hands& hands);
  void take_reading(const Row& row, OpenFile& file, const Hands& hands);
  void take_void(const Row& row, OpenFile& file, const Hands& hands);
  void take_intervention(const Row& row, OpenFile& file, const Hands& hands);
  /// False if it was known. `file` 0: it came by none.
  static bool keep(const Row& row, const JournalIntervention& stored, std::int64_t file, Journal& journal,
                   TakenIn& taken);
  [[nodiscard]] JournalIntervention intervention_of(const Row& row) const;
  /// False if the row was rejected and told of before the reading of its file was interrupted.
  static bool reject(OpenFile& file, const BadRow& bad, const Hands& hands);
  PieceAnswer finish(const FilePiece& piece, const OpenFile& file, const Hands& hands) const;
  [[nodiscard]] JournalReading keyed(const Row& row) const;

  std::shared_ptr<const Settings> settings_;
  std::map<Key, OpenFile> open_;
};

}  // namespace agreed
