// Drop files of long ago, read as the service reads them, without a journal to judge their rows.
#include <algorithm>
#include <map>
#include <string>
#include <string_view>
#include <tuple>

#include <fcntl.h>

#include "core/base/number_text.hpp"
#include "daemon/cli/intake_context.hpp"
#include "daemon/cli/past.hpp"
#include "daemon/descriptor.hpp"
#include "daemon/intake/file_reader.hpp"
#include "daemon/printable.hpp"

namespace agreed {
namespace {

namespace fs = std::filesystem;

constexpr std::size_t kFirstRejected = 20;
constexpr std::string_view kReasonEnd = ".reason.txt";

/// The key of a result as the journal has it.
using ReadingKey = std::tuple<AnalyzerIndex, MeasurandIndex, RowKind, std::string, Instant, std::int32_t>;

/// Rows in, what stands of them out.
class StandingRows {
 public:
  explicit StandingRows(Past& past) : past_(past) {}

  void take(const Row& row, const std::string& file) {
    if (row.kind == RowKind::intervention)
      interventions_.insert_or_assign(
          std::tuple(row.analyzer, row.standard, row.measurand, row.intervention, row.measured_at),
          Intervention{row.measured_at, row.analyzer, row.standard, row.measurand, row.intervention,
                       row.note});
    else if (row.kind == RowKind::void_)
      take_back(row, file);
    else
      add(row, file);
  }

  void reject(const std::string& file, std::uint32_t line, const std::string& reason) {
    ++past_.rejected;
    if (past_.first_rejected.size() < kFirstRejected) past_.first_rejected.push_back({file, line, reason});
  }

  /// To be called once, when every file was read.
  void finish() {
    for (const auto& [key, row] : standing_) {
      if (row.censored != Censoring::none) {
        ++past_.censored;
        continue;
      }
      ++past_.readings;
      if (row.kind == RowKind::check)
        past_.events.emplace_back(CheckReading{row.measured_at, row.analyzer, *row.standard, *row.measurand,
                                               row.replicate, row.value});
      else
        past_.events.emplace_back(
            SplitReading{row.measured_at, row.analyzer, row.item, *row.measurand, row.replicate, row.value});
    }
    for (const auto& [key, intervention] : interventions_) past_.events.emplace_back(intervention);
  }

 private:
  void add(const Row& row, const std::string& file) {
    const auto [place, is_new] = standing_.try_emplace(
        ReadingKey{row.analyzer, *row.measurand, row.kind, row.item, row.measured_at, row.replicate}, row);
    if (is_new) return;
    const Row& stands = place->second;
    if (stands.value == row.value && stands.censored == row.censored)
      ++past_.repeated;
    else
      reject(file, row.line,
             "conflict: found " + exact(row.value) + ", but " + exact(stands.value) +
                 " stands under the same key; take that back (kind void) first");
  }

  void take_back(const Row& row, const std::string& file) {
    bool any = false;
    for (const RowKind kind : {RowKind::check, RowKind::split})
      any = standing_.erase(ReadingKey{row.analyzer, *row.measurand, kind, row.item, row.measured_at,
                                       row.replicate}) > 0 ||
            any;
    if (any)
      ++past_.taken_back;
    else
      reject(file, row.line, "void: no reading stands under this key; nothing was taken back");
  }

  Past& past_;
  std::map<ReadingKey, Row> standing_;
  std::map<std::tuple<AnalyzerIndex, std::optional<StandardIndex>, std::optional<MeasurandIndex>,
                      InterventionKind, Instant>,
           Intervention>
      interventions_;
};

/// Files of the folder and below, by their path.
std::vector<fs::path> files_below(const fs::path& folder) {
  std::vector<fs::path> files;
  for (auto entry = fs::recursive_directory_iterator(folder); entry != fs::recursive_directory_iterator();
       ++entry) {
    const std::string name = entry->path().filename().string();
    if (entry->is_directory() && (name == "rejected" || name.starts_with('.')))
      entry.disable_recursion_pending();
    else if (entry->is_regular_file() && !name.ends_with(kReasonEnd))
      files.push_back(entry->path());
  }
  std::sort(files.begin(), files.end());
  return files;
}

void read_one(const fs::path& file, const std::string& shown, const IntakeSettings& intake,
              const PlainContext& context, StandingRows& rows) {
  const Descriptor folder(::open(file.parent_path().c_str(), O_RDONLY | O_DIRECTORY | O_CLOEXEC));
  const FileContent content(folder.get(), file.filename().string());
  const ReadTask task{file.filename().string(), true, intake.on_bad_row, {}, {}};
  const ReadOutcome outcome = read_file(content, task, context, [&](FilePiece&& piece) {
    if (!piece.unusable.empty()) {
      rows.reject(shown, 0, piece.unusable);
      return true;
    }
    for (const Row& row : piece.rows) rows.take(row, shown);
    for (const BadRow& bad : piece.bad) rows.reject(shown, bad.line, bad.reason);
    return true;
  });
  if (outcome == ReadOutcome::changed)
    throw std::runtime_error("The file " + shown + " was written to while it was read; try again.");
}

}  // namespace

Past read_past_folder(const Config& config, const fs::path& folder) {
  Past past;
  past.from = folder;
  StandingRows rows(past);
  bool any_folder = false;
  for (std::size_t i = 0; i < config.intake.size(); ++i) {
    const IntakeSettings& intake = config.intake[i];
    const fs::path of_analyzer = folder / intake.analyzer;
    if (!fs::is_directory(of_analyzer)) continue;
    any_folder = true;
    const PlainContext context = context_of(config, i);
    for (const fs::path& file : files_below(of_analyzer)) {
      if (!name_fault(intake, file.filename().string()).empty()) continue;
      read_one(file, printable(file.lexically_relative(folder).string()), intake, context, rows);
      ++past.files;
    }
  }
  if (!any_folder)
    throw std::runtime_error("The folder " + folder.string() +
                             " holds neither journal.sqlite nor a folder "
                             "named after an analyzer (such as " +
                             (folder / config.intake.front().analyzer).string() + ") with its drop files.");
  rows.finish();
  return past;
}

}  // namespace agreed
