#include "daemon/render/page_scene.hpp"

namespace agreed {
namespace {

const ComparisonView& empty_comparison() {
  static const ComparisonView empty{};
  return empty;
}

const ChartView& empty_chart() {
  static const ChartView empty{};
  return empty;
}

/// What tells how finely the numbers of a measurand need showing.
std::optional<double> scale_of(const Measurand& measurand, std::optional<double> sd) {
  if (!measurand.allowable) return sd;
  const double level = measurand.decision_levels.empty() ? 0.0 : measurand.decision_levels.front();
  const double allowable = measurand.allowable->at(level);
  return allowable > 0 ? std::optional(allowable) : sd;
}

}  // namespace

std::string title_or_id(const std::string& title, const std::string& id) {
  return title.empty() ? id : title;
}

std::string ComparisonScene::name() const {
  if (!asked.title.empty() && asked.title != asked.id) return asked.title;
  const std::string of = title_or_id(measurand.title, measurand.id);
  return asked.id == measurand.id ? of : of + " (" + asked.id + ")";
}

std::string ChartScene::name() const {
  return analyzer + ", " + standard + ", " + title_or_id(measurand.title, measurand.id);
}

ComparisonScene comparison_scene(const Snapshot& snapshot, ComparisonIndex index) {
  const Settings& settings = *snapshot.settings;
  const ComparisonSettings& asked = settings.of(index);
  const bool there = index.value < snapshot.comparisons.size() && snapshot.comparisons[index.value];
  const ComparisonView& view = there ? *snapshot.comparisons[index.value] : empty_comparison();
  const Measurand& measurand = settings.of(asked.measurand);
  const auto sd = view.difference ? std::optional(view.difference->sd) : std::nullopt;
  return {settings,
          asked,
          measurand,
          view,
          settings.of(asked.x).id,
          settings.of(asked.y).id,
          number_style(measurand, scale_of(measurand, sd)),
          snapshot.at};
}

ChartScene chart_scene(const Snapshot& snapshot, ChartIndex index) {
  const Settings& settings = *snapshot.settings;
  const ChartSettings& asked = settings.of(index);
  const bool there = index.value < snapshot.charts.size() && snapshot.charts[index.value];
  const ChartView& view = there ? *snapshot.charts[index.value] : empty_chart();
  const Measurand& measurand = settings.of(asked.measurand);
  return {settings,
          asked,
          measurand,
          view,
          settings.of(asked.analyzer).id,
          settings.of(asked.standard).id,
          number_style(measurand, scale_of(measurand, view.baseline.sd)),
          snapshot.at};
}

ComparisonScene with_view(const ComparisonScene& scene, const ComparisonView& view) {
  return {scene.settings, scene.asked, scene.measurand, view, scene.x, scene.y, scene.style, scene.at};
}

ChartScene with_view(const ChartScene& scene, const ChartView& view) {
  return {scene.settings, scene.asked,    scene.measurand, view,
          scene.analyzer, scene.standard, scene.style,     scene.at};
}

std::string comparison_path(const ComparisonSettings& comparison) {
  return "/comparisons/" + path_segment(comparison.id);
}

std::string chart_path(const Settings& settings, const ChartSettings& chart) {
  return "/charts/" + path_segment(settings.of(chart.analyzer).id) + "/" +
         path_segment(settings.of(chart.standard).id) + "/" + path_segment(settings.of(chart.measurand).id);
}

}  // namespace agreed
