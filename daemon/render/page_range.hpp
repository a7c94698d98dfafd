#pragma once
// Which part of a history a page draws: so many points, from a time on. Chosen by plain links.
#include <map>
#include <optional>
#include <string>
#include <vector>

#include "core/base/instant.hpp"
#include "core/chart/chart_view.hpp"
#include "core/pair/comparison_view.hpp"

namespace agreed {

struct PageRange {
  std::optional<int> most;      ///< 1..500; none: all there are
  std::optional<Instant> from;  ///< measured at or after; none: the newest
  std::string error;            ///< what is wrong with the parameters; empty: nothing
};

/// From the parameters `name` (a whole number) and `from` (an RFC 3339 time with its offset).
[[nodiscard]] PageRange read_range(const std::map<std::string, std::string>& parameters,
                                   const std::string& name);

/// [first, first + count) of `times`, which run oldest first: without `from` the newest `most`, with it the
/// first `most` from then on.
struct RangeCut {
  std::size_t first = 0, count = 0;
};
[[nodiscard]] RangeCut cut_of(const std::vector<Instant>& times, const PageRange& range);

[[nodiscard]] std::vector<Instant> times_of(const ChartView& view);
[[nodiscard]] std::vector<Instant> times_of(const ComparisonView& view);

/// The view with only that part of its points and of what is drawn beside them. What was worked out from all
/// of them (limits, fits, verdicts) stays.
[[nodiscard]] ChartView cut_to(const ChartView& view, const RangeCut& cut);
[[nodiscard]] ComparisonView cut_to(const ComparisonView& view, const RangeCut& cut);

/// What is shown, in words, and links to more, fewer, earlier and later ones of `path`; empty when there is
/// nothing to choose. `name`: as in read_range. `things`: "readings".
[[nodiscard]] std::string range_html(const std::string& path, const std::string& name,
                                     const std::string& things, const std::vector<Instant>& times,
                                     const PageRange& range, const RangeCut& cut);

}  // namespace agreed
