// The pairs with the fitted line and the identity line.
#include <algorithm>

#include "daemon/render/page_words.hpp"
#include "daemon/render/svg_figures.hpp"
#include "daemon/render/svg_plot.hpp"

namespace agreed {
namespace {

constexpr std::size_t kSmallPairsFigure = 100;
constexpr const char* kDiamond = "M13 1L20 8L13 15L6 8Z";

std::string pair_note(const PairView& pair) {
  if (pair.outlier) return "outlier, set aside";
  return pair.in_window ? "in the window" : "before the window";
}

/// The corridor y = x +- A(x): two lines that share their x.
void add_corridor(Plot& plot, const AllowableDifference& allowable, Extent x) {
  constexpr int kSteps = 24;
  std::vector<PlotPoint> upper, lower;
  for (int i = 0; i <= kSteps; ++i) {
    const double at = x.low + (x.high - x.low) * i / kSteps;
    upper.push_back({at, at + allowable.at(at)});
    lower.push_back({at, at - allowable.at(at)});
  }
  plot.area(upper, lower, "allowed");
}

std::string draw_pairs(const ComparisonScene& scene, const std::vector<PairView>& pairs, const Figure& figure,
                       FigureSize size) {
  ExtentOf values;
  for (const PairView& pair : pairs) {
    values.add(pair.x);
    values.add(pair.y);
  }
  // Both axes alike, so that the identity line is the diagonal.
  const Extent extent = values.padded(0.06);
  Plot plot(figure.id, size, extent, extent, 18);
  plot.value_axis_x(scene.x + ", " + scene.style.unit);
  plot.value_axis_y(scene.y + ", " + scene.style.unit);
  if (scene.measurand.allowable) add_corridor(plot, *scene.measurand.allowable, extent);
  for (const double level : scene.measurand.decision_levels) plot.upright(level, "level", shortest(level));
  plot.line({{extent.low, extent.low}, {extent.high, extent.high}}, "identity");
  std::vector<PlotPoint> inside, before;
  for (const PairView& pair : pairs)
    if (!pair.outlier) (pair.in_window ? inside : before).push_back({pair.x, pair.y});
  plot.dots(before, "dots past");
  plot.dots(inside, "dots");
  if (scene.view.fit) {
    const FitView& fit = *scene.view.fit;
    plot.line({{extent.low, fit.intercept + fit.slope * extent.low},
               {extent.high, fit.intercept + fit.slope * extent.high}},
              "fitted");
  }
  for (const PairView& pair : pairs)
    if (pair.outlier)
      plot.shape(Shape::diamond, {pair.x, pair.y}, "hollow",
                 "outlier, set aside: " + shortened(pair.sample, 60));
  return plot.svg(figure.heading, figure.summary);
}

void add_legend(Figure& figure, const ComparisonScene& scene, const std::vector<PairView>& pairs) {
  const auto any = [&](auto&& what) { return std::any_of(pairs.begin(), pairs.end(), what); };
  figure.legend = {{legend_dot("dots"), "pair"}};
  if (any([](const PairView& p) { return !p.in_window && !p.outlier; }))
    figure.legend.push_back({legend_dot("dots past"), "pair before the window"});
  if (any([](const PairView& p) { return p.outlier; }))
    figure.legend.push_back({legend_path("hollow", kDiamond), "outlier, set aside"});
  if (scene.view.fit) figure.legend.push_back({legend_line("fitted"), "fitted line"});
  figure.legend.push_back({legend_line("identity"), "identity"});
  if (scene.measurand.allowable) figure.legend.push_back({legend_area("allowed"), "allowable"});
  if (!scene.measurand.decision_levels.empty())
    figure.legend.push_back({legend_line("level"), "decision level"});
}

}  // namespace

Figure pairs_figure(const ComparisonScene& scene, FigureDetail detail) {
  Figure figure;
  figure.id = "pairs." + id_part(scene.asked.id);
  figure.heading = "Pairs";
  figure.summary = pairs_words(scene);
  const bool full = detail == FigureDetail::full;
  const auto pairs = newest(scene.view.pairs, full ? scene.view.pairs.size() : kSmallPairsFigure);
  if (pairs.empty()) return figure;
  figure.drawing = draw_pairs(scene, pairs, figure, {360, full ? 340.0 : 330.0});
  add_legend(figure, scene, pairs);
  const int decimals = scene.style.decimals;
  figure.table = {"Pairs, newest first",
                  {"sample", "measured at", scene.x, scene.y, "difference", "residual", "use"},
                  {}};
  for (auto pair = pairs.rbegin(); pair != pairs.rend(); ++pair)
    figure.table.rows.push_back({pair->sample, time_words(pair->measured_at), shown(pair->x, decimals),
                                 shown(pair->y, decimals), shown_signed(pair->y - pair->x, decimals),
                                 pair->residual ? shown(*pair->residual, 2) : "", pair_note(*pair)});
  if (!full) keep_newest(figure.table, kSmallTable);
  return figure;
}

}  // namespace agreed
