#pragma once
// What kind of lasting change explains a stretch, since when, and how well. Gains are differences of the
// normal log-likelihood over one mean and one sd for all readings; estimated starts after Hinkley,
// Biometrika 57 (1970) 1. Every variance is held above what the resolution allows. O(readings held).
#include <cstddef>
#include <limits>

#include "core/chart/level_score.hpp"
#include "core/chart/stretch.hpp"

namespace agreed {

struct Explanation {
  std::size_t position = 0;  ///< best split
  double gain = -std::numeric_limits<double>::infinity();
  /// First and last split within 3 log-likelihood units of the best.
  std::size_t first = 0, last = 0;
};

/// Two means, one sd.
[[nodiscard]] Explanation explain_by_two_means(const Stretch& stretch, const LevelSplit& best);

/// One mean, two sds, the later one larger; of replicates within their runs where precision is told by them.
[[nodiscard]] Explanation explain_by_two_sds(const Stretch& stretch);

/// A mean and an sd of the readings (run means) on each side, the later sd larger. first and last are not
/// filled in.
[[nodiscard]] Explanation explain_by_two_normals(const Stretch& stretch);

}  // namespace agreed
