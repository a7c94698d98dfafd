#pragma once
// What one comparison's or one chart's part of the page is made from: its view with the settings beside it.
#include <string>
#include <vector>

#include "daemon/engine/snapshot.hpp"
#include "daemon/render/page_text.hpp"

namespace agreed {

struct ComparisonScene {
  const Settings& settings;
  const ComparisonSettings& asked;
  const Measurand& measurand;
  const ComparisonView& view;
  std::string x, y;  ///< analyzer ids
  PageNumberStyle style;
  Instant at;  ///< of the snapshot

  /// "Protein" or the comparison's own title.
  [[nodiscard]] std::string name() const;
};

struct ChartScene {
  const Settings& settings;
  const ChartSettings& asked;
  const Measurand& measurand;
  const ChartView& view;
  std::string analyzer, standard;
  PageNumberStyle style;
  Instant at;

  /// "line1, wheat-low, Protein".
  [[nodiscard]] std::string name() const;
};

/// The snapshot must have settings; a view that is not there yet is taken as an empty one.
[[nodiscard]] ComparisonScene comparison_scene(const Snapshot& snapshot, ComparisonIndex index);
[[nodiscard]] ChartScene chart_scene(const Snapshot& snapshot, ChartIndex index);

/// The same with another view, which outlives the scene.
[[nodiscard]] ComparisonScene with_view(const ComparisonScene& scene, const ComparisonView& view);
[[nodiscard]] ChartScene with_view(const ChartScene& scene, const ChartView& view);

[[nodiscard]] std::string title_or_id(const std::string& title, const std::string& id);
[[nodiscard]] std::string comparison_path(const ComparisonSettings& comparison);
[[nodiscard]] std::string chart_path(const Settings& settings, const ChartSettings& chart);

}  // namespace agreed
