#pragma once
// Pairs from split readings: which results of a sample belong together (4-intake, Pairing).
//
// All rows of a sample on one analyzer within `within` of the first are its replicates and are averaged to
// one half. Halves of the two analyzers pair when their first results lie at most `within` apart, nearest in
// time first. So the pairs of a sample are a function of its set of rows, whatever their order of arrival.
#include <cstdint>
#include <deque>
#include <optional>
#include <string>
#include <string_view>
#include <unordered_map>
#include <vector>

#include "core/base/event.hpp"
#include "core/pair/pair.hpp"

namespace agreed {

/// One row of a sample on one analyzer.
struct SideRow {
  Instant at{};
  std::int32_t replicate = 0;
  double value = 0;
};

/// The rows of one sample on the two analyzers of a comparison, each side in order of (at, replicate).
struct SampleRows {
  std::vector<SideRow> x, y;

  void add(bool to_x, const SideRow& row);
};

/// The pairs of one sample, by time.
[[nodiscard]] std::vector<Pair> pairs_of(const std::string& sample, const SampleRows& rows, Duration within);

/// Whether the half that a row measured at `at` on one side belongs to is without a partner; false when there
/// is no such row (it was taken back).
[[nodiscard]] bool lacks_partner(const SampleRows& rows, bool on_x, Instant at, Duration within);

/// The samples a comparison saw last, so that a half finds its partner and a late replicate its pair.
/// Bounded: the oldest are forgotten, and `may_have_forgotten` says when the journal must be asked.
class SampleMemory {
 public:
  static constexpr std::size_t kCapacity = 20'000;

  explicit SampleMemory(Duration within) : within_(within) {}

  /// The rows of a sample; nothing when it is not remembered.
  [[nodiscard]] const SampleRows* find(const std::string& sample) const;
  /// Sets a sample's rows; forgets the oldest samples beyond the capacity.
  void put(const std::string& sample, SampleRows rows, bool paired);
  /// True when rows of a sample measured near `at` may have been forgotten.
  [[nodiscard]] bool may_have_forgotten(Instant at) const;
  /// Remembered samples without a pair.
  [[nodiscard]] std::int64_t waiting() const { return waiting_; }
  void clear();

 private:
  struct Entry {
    SampleRows rows;
    bool paired = false;
  };
  void forget_oldest();

  Duration within_;
  std::unordered_map<std::string, Entry> entries_;
  std::deque<std::string> order_;
  std::int64_t waiting_ = 0;
  std::optional<Instant> horizon_;  ///< newest row of a forgotten sample
};

}  // namespace agreed
