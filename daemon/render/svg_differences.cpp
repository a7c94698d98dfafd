// Differences of the pairs against their mean, with the mean difference and the limits of agreement
// (Bland and Altman 1986).
#include "daemon/render/page_words.hpp"
#include "daemon/render/svg_figures.hpp"
#include "daemon/render/svg_plot.hpp"

namespace agreed {
namespace {

void add_limits(Plot& plot, const ComparisonScene& scene) {
  if (!scene.view.difference) return;
  const DifferenceView& d = *scene.view.difference;
  const int decimals = scene.style.decimals;
  plot.band(d.upper_limit_interval[0], d.upper_limit_interval[1], "interval");
  plot.band(d.lower_limit_interval[0], d.lower_limit_interval[1], "interval");
  plot.band(d.mean_interval[0], d.mean_interval[1], "interval");
  plot.across(d.mean, "fitted", shown_signed(d.mean, decimals));
  plot.across(d.upper_limit, "limit", shown_signed(d.upper_limit, decimals));
  plot.across(d.lower_limit, "limit", shown_signed(d.lower_limit, decimals));
}

void add_allowable(Plot& plot, const AllowableDifference& allowable, Extent x) {
  constexpr int kSteps = 24;
  std::vector<PlotPoint> upper, lower;
  for (int i = 0; i <= kSteps; ++i) {
    const double at = x.low + (x.high - x.low) * i / kSteps;
    upper.push_back({at, allowable.at(at)});
    lower.push_back({at, -allowable.at(at)});
  }
  plot.area(upper, lower, "allowed");
  plot.line(upper, "allowed-edge");
  plot.line(lower, "allowed-edge");
}

std::string draw_differences(const ComparisonScene& scene, const Figure& figure, const std::string& id,
                             FigureSize size) {
  ExtentOf across, up;
  std::vector<PlotPoint> inside, before;
  for (const PairView& pair : scene.view.pairs) {
    const PlotPoint at{(pair.x + pair.y) / 2, pair.y - pair.x};
    across.add(at.x);
    up.add(at.y);
    if (!pair.outlier) (pair.in_window ? inside : before).push_back(at);
  }
  up.add(0);
  if (scene.view.difference) {
    up.add(scene.view.difference->upper_limit_interval[1]);
    up.add(scene.view.difference->lower_limit_interval[0]);
  }
  const Extent x = across.padded(0.04);
  if (scene.measurand.allowable)
    for (const double end : {x.low, x.high}) {
      up.add(scene.measurand.allowable->at(end));
      up.add(-scene.measurand.allowable->at(end));
    }
  Plot plot(id, size, x, up.padded(0.1));
  plot.value_axis_x("mean of " + scene.x + " and " + scene.y + ", " + scene.style.unit);
  plot.value_axis_y(scene.y + " \u2212 " + scene.x + ", " + scene.style.unit);
  if (scene.measurand.allowable) add_allowable(plot, *scene.measurand.allowable, x);
  add_limits(plot, scene);
  plot.across(0, "zero");
  plot.dots(before, "dots past");
  plot.dots(inside, "dots");
  for (const PairView& pair : scene.view.pairs)
    if (pair.outlier)
      plot.shape(Shape::diamond, {(pair.x + pair.y) / 2, pair.y - pair.x}, "hollow",
                 "outlier, set aside: " + shortened(pair.sample, 60));
  return plot.svg(figure.heading, figure.summary);
}

}  // namespace

Figure differences_figure(const ComparisonScene& scene, FigureDetail detail) {
  Figure figure;
  figure.id = "differences." + id_part(scene.asked.id);
  figure.heading = "Differences";
  figure.summary = difference_words(scene);
  if (scene.view.pairs.empty()) return figure;
  figure.drawing = draw_differences(scene, figure, figure.id, {360, 240});
  if (detail == FigureDetail::full)
    figure.wide = draw_differences(scene, figure, figure.id + ".wide", {960, 320});
  figure.legend = {{legend_dot("dots"), "pair"}};
  if (scene.view.difference) {
    figure.legend.push_back({legend_line("fitted"), "mean difference"});
    figure.legend.push_back({legend_line("limit"), "limits of agreement"});
    figure.legend.push_back({legend_area("interval"), "their 95 % intervals"});
  }
  if (scene.measurand.allowable) figure.legend.push_back({legend_area("allowed"), "allowable"});
  if (!scene.view.difference) return figure;
  const DifferenceView& d = *scene.view.difference;
  const int decimals = scene.style.decimals;
  const auto row = [&](const std::string& name, double value, const Interval& interval) {
    figure.table.rows.push_back({name, shown_signed(value, decimals), shown_signed(interval[0], decimals),
                                 shown_signed(interval[1], decimals)});
  };
  figure.table = {"Differences " + scene.y + " \u2212 " + scene.x + ", " + scene.style.unit,
                  {"figure", "value", "95 % low", "95 % high"},
                  {}};
  row("upper limit of agreement", d.upper_limit, d.upper_limit_interval);
  row("mean difference", d.mean, d.mean_interval);
  row("lower limit of agreement", d.lower_limit, d.lower_limit_interval);
  return figure;
}

}  // namespace agreed
