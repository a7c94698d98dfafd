// Bias at a decision level within its allowable band, over time.
#include <algorithm>
#include <cmath>

#include "daemon/render/page_words.hpp"
#include "daemon/render/svg_figures.hpp"
#include "daemon/render/svg_plot.hpp"

namespace agreed {
namespace {

constexpr std::size_t kSmallBiasFigure = 120;

struct BiasRow {
  double at = 0, bias = 0, low = 0, high = 0;
};

/// The history of one level; points without it, or without a finite number, are left out.
std::vector<BiasRow> rows_of(const ComparisonView& view, std::size_t level, std::size_t most) {
  std::vector<BiasRow> rows;
  for (const BiasPoint& point : newest(view.bias_history, most)) {
    if (level >= point.levels.size()) continue;
    const auto& [bias, low, high] = point.levels[level];
    if (std::isfinite(bias) && std::isfinite(low) && std::isfinite(high))
      rows.push_back({on_axis(point.at), bias, low, high});
  }
  return rows;
}

/// Room for the allowable band and the bias; early intervals may be far wider and are clipped.
Extent bias_extent(const std::vector<BiasRow>& rows, const LevelView& level) {
  ExtentOf extent;
  extent.add(0);
  if (level.allowable) {
    extent.add(*level.allowable);
    extent.add(-*level.allowable);
  }
  for (const BiasRow& row : rows) extent.add(row.bias);
  extent.add(rows.back().low);
  extent.add(rows.back().high);
  return extent.padded(0.14);
}

Shape verdict_shape(Verdict verdict) {
  if (verdict == Verdict::agreement_shown) return Shape::circle;
  return verdict == Verdict::disagreement_shown ? Shape::square : Shape::diamond;
}

std::string verdict_css(Verdict verdict) {
  if (verdict == Verdict::agreement_shown) return "mark yes";
  return verdict == Verdict::disagreement_shown ? "mark no" : "mark notyet";
}

/// Two lines where the comparison began anew: what stood before does not lead into what stands after.
void add_trend(Plot& plot, const std::vector<BiasRow>& rows, const std::optional<Instant>& anew) {
  std::vector<PlotPoint> upper, lower, middle;
  const auto flush = [&] {
    plot.area(upper, lower, "interval");
    plot.line(upper, "interval-edge");
    plot.line(lower, "interval-edge");
    plot.line(middle, "trend");
    upper.clear();
    lower.clear();
    middle.clear();
  };
  for (const BiasRow& row : rows) {
    if (anew && row.at >= on_axis(*anew) && !middle.empty() && middle.back().x < on_axis(*anew)) flush();
    upper.push_back({row.at, row.high});
    lower.push_back({row.at, row.low});
    middle.push_back({row.at, row.bias});
  }
  flush();
}

std::string draw_bias(const ComparisonScene& scene, const LevelView& level, const std::vector<BiasRow>& rows,
                      const Figure& figure, const std::string& id, FigureSize size) {
  ExtentOf times;
  for (const BiasRow& row : rows) times.add(row.at);
  Plot plot(id, size, times.padded(0.02, kLeastTime), bias_extent(rows, level));
  plot.value_axis_y("bias " + scene.y + " \u2212 " + scene.x + ", " + scene.style.unit);
  plot.time_axis_x();
  const int decimals = scene.style.decimals;
  if (level.allowable) {
    const double a = *level.allowable;
    plot.band(-a, a, "allowed");
    plot.across(a, "allowed-edge", shown_signed(a, decimals));
    plot.across(-a, "allowed-edge", shown_signed(-a, decimals));
  }
  plot.across(0, "zero");
  add_trend(plot, rows, scene.view.window.since_intervention);
  if (scene.view.window.since_intervention)
    plot.upright(on_axis(*scene.view.window.since_intervention), "event");
  if (scene.view.pair_chart.started_at) plot.upright(on_axis(*scene.view.pair_chart.started_at), "begun");
  const BiasRow& last = rows.back();
  plot.shape(verdict_shape(level.verdict), {last.at, last.bias}, verdict_css(level.verdict),
             verdict_words(level.verdict));
  return plot.svg(figure.heading, figure.summary);
}

}  // namespace

double on_axis(Instant at) {
  return static_cast<double>(at.time_since_epoch().count());
}

Figure bias_figure(const ComparisonScene& scene, std::size_t index, FigureDetail detail) {
  const LevelView& level = scene.view.levels.at(index);
  Figure figure;
  figure.id = "bias." + id_part(scene.asked.id) + "." + std::to_string(index);
  figure.heading = "Bias at " + shortest(level.level) + " " + scene.style.unit;
  figure.summary = level_words(scene, level);
  const bool full = detail == FigureDetail::full;
  const auto rows = rows_of(scene.view, index, full ? scene.view.bias_history.size() : kSmallBiasFigure);
  if (rows.empty()) return figure;
  figure.drawing = draw_bias(scene, level, rows, figure, figure.id, {360, full ? 220.0 : 180.0});
  if (full) figure.wide = draw_bias(scene, level, rows, figure, figure.id + ".wide", {960, 300});
  figure.legend = {{legend_line("trend"), "bias"}, {legend_area("interval"), "90 % interval"}};
  if (level.allowable) figure.legend.push_back({legend_area("allowed"), "allowable"});
  if (scene.view.pair_chart.started_at)
    figure.legend.push_back({legend_line("begun"), "estimated start of the change"});
  if (scene.view.window.since_intervention)
    figure.legend.push_back({legend_line("event"), "the comparison began anew"});
  figure.table = {figure.heading + ", newest first", {"at", "bias", "low", "high"}, {}};
  const int decimals = scene.style.decimals;
  for (auto row = rows.rbegin(); row != rows.rend(); ++row)
    figure.table.rows.push_back({time_words(Instant(Duration(static_cast<std::int64_t>(row->at)))),
                                 shown_signed(row->bias, decimals), shown_signed(row->low, decimals),
                                 shown_signed(row->high, decimals)});
  if (!full) keep_newest(figure.table, kSmallTable);
  return figure;
}

}  // namespace agreed
