#pragma once
// The figures of the page. `small` ones draw the newest part and are for places with many of them.
#include <cstddef>
#include <vector>

#include "daemon/render/page_figure.hpp"
#include "daemon/render/page_scene.hpp"

namespace agreed {

/// Bias at one decision level within its allowable band, over time, with its 90 % interval.
[[nodiscard]] Figure bias_figure(const ComparisonScene& scene, std::size_t level, FigureDetail detail);
/// The pairs with the fitted line and the identity line.
[[nodiscard]] Figure pairs_figure(const ComparisonScene& scene, FigureDetail detail);
/// Differences y - x against the mean of both, with their mean and limits of agreement.
[[nodiscard]] Figure differences_figure(const ComparisonScene& scene, FigureDetail detail);
/// Residuals of the pairs over time, and the pair chart's score against its limits.
[[nodiscard]] Figure pair_chart_figure(const ComparisonScene& scene, FigureDetail detail);
/// Readings of a check standard with centre line, limits, signals, marks and moving ranges.
[[nodiscard]] Figure control_chart_figure(const ChartScene& scene, FigureDetail detail);

/// The shortest time axis, in milliseconds.
inline constexpr double kLeastTime = 6 * 3600e3;

/// Rows in the table of a small figure.
inline constexpr std::size_t kSmallTable = 20;

/// Milliseconds since 1970 UTC, for a time axis.
[[nodiscard]] double on_axis(Instant at);
/// The newest `most` of a list.
template <class T>
[[nodiscard]] std::vector<T> newest(const std::vector<T>& all, std::size_t most) {
  return {all.size() > most ? all.end() - static_cast<std::ptrdiff_t>(most) : all.begin(), all.end()};
}

}  // namespace agreed
