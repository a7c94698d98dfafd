#pragma once
// Purpose: what the pairs know of an open change of their relation, for the diagnosis and the look-back.
// Method: before and after are split at the estimated start. That of a warning is the best split of the
//   present stretch; that of a critical signal was fixed at the signal, when the stretch restarted there:
//   what came before it was remembered then. Agreement can be lost without a change that the pair chart finds
//   (below its limit by more than 0.9): then there is no moment.
// Bounded: the newest 500 pairs on either side count.
// Cost: one scan of the splits and O(500).
#include <optional>

#include "core/base/finding.hpp"
#include "core/pair/comparison_view.hpp"
#include "core/pair/moments.hpp"

namespace agreed {

struct PairSplit {
  Instant since;  ///< nothing earlier counts as before
  Instant started_at;
  Period started_between;
  Moments before, after;
  double delta = 1;  ///< var(y error) / var(x error) of the pairs
};

/// An open signal of the pair chart, or agreement lost.
struct ComparisonChange {
  std::optional<PairSplit> split;  ///< none: no one moment is found
  LookBackView look_back;
};

}  // namespace agreed
