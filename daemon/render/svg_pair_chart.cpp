// The pair chart: residuals of the pairs over time, and the change score against its two limits.
#include <algorithm>

#include "daemon/render/page_words.hpp"
#include "daemon/render/svg_figures.hpp"
#include "daemon/render/svg_plot.hpp"

namespace agreed {
namespace {

std::string draw_pair_chart(const ComparisonScene& scene, const Figure& figure, const std::string& id,
                            FigureSize size) {
  ExtentOf times, residuals;
  std::vector<PlotPoint> inside, before;
  for (const PairView& pair : scene.view.pairs) {
    if (!pair.residual) continue;
    const PlotPoint at{on_axis(pair.measured_at), *pair.residual};
    times.add(at.x);
    residuals.add(at.y);
    if (!pair.outlier) (pair.in_window ? inside : before).push_back(at);
  }
  if (times.empty()) return {};
  residuals.add(-3);
  residuals.add(3);
  Plot plot(id, size, times.padded(0.02, kLeastTime), residuals.padded(0.08), 18);
  plot.value_axis_y("residual from the line, in its sd");
  plot.time_axis_x();
  const PairChartView& chart = scene.view.pair_chart;
  if (chart.started_between)
    plot.block(on_axis(chart.started_between->first), on_axis(chart.started_between->last), "doubt");
  plot.across(0, "zero");
  if (scene.view.window.since_intervention)
    plot.upright(on_axis(*scene.view.window.since_intervention), "event");
  plot.dots(before, "dots past");
  plot.dots(inside, "dots");
  if (chart.started_at) plot.upright(on_axis(*chart.started_at), "begun", "start");
  for (const PairView& pair : scene.view.pairs)
    if (pair.outlier && pair.residual)
      plot.shape(Shape::diamond, {on_axis(pair.measured_at), *pair.residual}, "hollow",
                 "outlier, set aside: " + shortened(pair.sample, 60));
  return plot.svg(figure.heading, figure.summary);
}

std::string pair_of(const ComparisonScene& scene, const std::optional<Instant>& at) {
  return at ? time_words(*at) : scene.view.pair_chart.state == PairChartState::learning ? "not yet" : "none";
}

}  // namespace

Figure pair_chart_figure(const ComparisonScene& scene, FigureDetail detail) {
  const PairChartView& chart = scene.view.pair_chart;
  Figure figure;
  figure.id = "pair-chart." + id_part(scene.asked.id);
  figure.heading = "Pair chart: did the relation change?";
  figure.summary = pair_chart_words(scene);
  figure.drawing = draw_pair_chart(scene, figure, figure.id, {360, 210});
  if (detail == FigureDetail::full && !figure.drawing.empty())
    figure.wide = draw_pair_chart(scene, figure, figure.id + ".wide", {960, 280});
  if (!figure.drawing.empty()) {
    figure.legend = {{legend_dot("dots"), "pair"}};
    if (chart.started_at) figure.legend.push_back({legend_line("begun"), "estimated start of the change"});
    if (chart.started_between) figure.legend.push_back({legend_area("doubt"), "the change began within"});
    if (scene.view.window.since_intervention)
      figure.legend.push_back({legend_line("event"), "the comparison began anew"});
  }
  figure.table = {"Pair chart",
                  {"figure", "value"},
                  {{"change score", chart.score ? shown(*chart.score, 2) : "not yet"},
                   {"limit (warning)", shown(chart.limit, 2)},
                   {"limit (critical)", shown(chart.critical_limit, 2)},
                   {"in-control run length, pairs", shown(chart.in_control_run_length, 0)},
                   {"estimated start", pair_of(scene, chart.started_at)}}};
  return figure;
}

}  // namespace agreed
