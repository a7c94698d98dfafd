#pragma once
// Purpose: at which pairs was agreement shown? So that a look back from a change finds the last good pair
//   before it.
// Method: the verdict is shown over runs of pairs; each is kept by its first and its last pair. Bounded: the
//   newest 1,000 runs. A run and what ends it take two pairs at least, so they reach back over 2,000 pairs,
//   further than any start that the pair chart can estimate.
// Cost: O(1) a pair.
#include <cstdint>
#include <deque>
#include <optional>

#include "core/base/instant.hpp"

namespace agreed {

struct PairMark {
  Instant at{};
  std::int64_t serial = 0;  ///< number of the pair in the comparison, from 1
  bool operator==(const PairMark&) const = default;
};

/// A run of pairs at which agreement was shown.
struct AgreementRun {
  PairMark first, last;
};

class AgreementRecord {
 public:
  /// Agreement is shown at this pair; `anew`: it was not at the pair before.
  void shown(const PairMark& pair, bool anew);

  /// The newest run that began before `at`.
  [[nodiscard]] std::optional<AgreementRun> run_before(Instant at) const;

 private:
  std::deque<AgreementRun> runs_;
};

}  // namespace agreed
