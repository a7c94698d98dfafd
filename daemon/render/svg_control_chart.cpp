// A control chart: readings with centre line and narrowing limits, signals, marks, and the moving ranges
// below.
#include <algorithm>
#include <set>

#include "daemon/render/page_chart_words.hpp"
#include "daemon/render/svg_figures.hpp"
#include "daemon/render/svg_plot.hpp"

namespace agreed {
namespace {

/// A lot keeps its name as it is written; an intervention is a word of ours.
std::string mark_words(const std::string& what) {
  return what.starts_with("lot ") ? what : spaced(what);
}

constexpr std::size_t kSmallChartFigure = 60;

struct SignalMark {
  Shape shape;
  const char* sample;  ///< the same as a path, for the legend
};

SignalMark mark_of(ChartSignal signal) {
  switch (signal) {
    case ChartSignal::single_high:
    case ChartSignal::above_limit:
      return {Shape::triangle_up, "M13 1L19 13L7 13Z"};
    case ChartSignal::single_low:
    case ChartSignal::below_limit:
      return {Shape::triangle_down, "M13 15L19 3L7 3Z"};
    case ChartSignal::shift_up:
      return {Shape::double_up, "M7 8L13 0L19 8ZM7 15L13 7L19 15Z"};
    case ChartSignal::shift_down:
      return {Shape::double_down, "M7 8L13 16L19 8ZM7 1L13 9L19 1Z"};
    case ChartSignal::scatter_up:
    case ChartSignal::moving_range_above_limit:
    case ChartSignal::range_above_limit:
    case ChartSignal::standard_deviation_above_limit:
      return {Shape::star, "M13 0L15 6L21 8L15 10L13 16L11 10L5 8L11 6Z"};
    case ChartSignal::ewma:
    case ChartSignal::cusum:
    case ChartSignal::same_side:
    case ChartSignal::trend:
    case ChartSignal::two_of_three_beyond:
    case ChartSignal::four_of_five_beyond:
    case ChartSignal::alternating:
    case ChartSignal::near_centre:
    case ChartSignal::away_from_centre:
      break;
  }
  return {Shape::diamond, "M13 1L20 8L13 15L6 8Z"};
}

std::string signals_text(const ChartPoint& point) {
  std::string out;
  for (const ChartSignal signal : point.signals) out += (out.empty() ? "" : ", ") + signal_words(signal);
  return out;
}

/// The shown points with what all parts of the drawing share.
struct Canvas {
  std::vector<ChartPoint> points;
  Extent time;
};

Canvas canvas_of(const ChartView& view, std::size_t most) {
  Canvas canvas{newest(view.points, most), {}};
  ExtentOf time;
  for (const ChartPoint& point : canvas.points) time.add(on_axis(point.measured_at));
  for (const StretchMark& mark : view.marks)
    if (mark.at >= canvas.points.front().measured_at) time.add(on_axis(mark.at));
  canvas.time = time.padded(0.02, kLeastTime);
  return canvas;
}

Extent value_extent(const ChartView& view, const Canvas& canvas) {
  ExtentOf extent;
  for (const ChartPoint& point : canvas.points) extent.add(point.value);
  // The limits of the first readings of a stretch are far apart and are clipped; those of the last are not.
  if (view.upper_limit) extent.add(*view.upper_limit);
  if (view.lower_limit) extent.add(*view.lower_limit);
  return extent.padded(0.1);
}

/// Marks the readings of the present stretch up to the last one of its baseline.
void add_learning(Plot& plot, const ChartView& view, const Canvas& canvas) {
  const auto begun = std::find_if(canvas.points.rbegin(), canvas.points.rend(),
                                  [](const ChartPoint& p) { return p.starts_stretch; });
  if (begun == canvas.points.rend()) return;
  int learned = 0;
  auto last = begun.base() - 1;
  for (auto point = last; point != canvas.points.end() && learned < view.baseline.needed; ++point) {
    if (point->set_aside) continue;
    ++learned;
    last = point;
  }
  plot.block(on_axis((begun.base() - 1)->measured_at), on_axis(last->measured_at), "learning");
}

/// Limits as areas, one per stretch, since those of two stretches have nothing to do with each other.
void add_limits(Plot& plot, const Canvas& canvas) {
  std::vector<PlotPoint> upper, lower;
  const auto flush = [&] {
    plot.area(upper, lower, "expected");
    plot.line(upper, "limit");
    plot.line(lower, "limit");
    upper.clear();
    lower.clear();
  };
  for (const ChartPoint& point : canvas.points) {
    if (point.starts_stretch) flush();
    if (!point.upper || !point.lower) continue;
    upper.push_back({on_axis(point.measured_at), *point.upper});
    lower.push_back({on_axis(point.measured_at), *point.lower});
  }
  flush();
}

/// The line of the EWMA with its limits.
void add_ewma(Plot& plot, const Canvas& canvas) {
  std::vector<PlotPoint> value, upper, lower;
  const auto flush = [&] {
    plot.line(value, "fitted");
    plot.line(upper, "limit");
    plot.line(lower, "limit");
    value.clear();
    upper.clear();
    lower.clear();
  };
  for (const ChartPoint& point : canvas.points) {
    if (point.starts_stretch) flush();
    if (!point.classical || !point.classical->ewma) continue;
    const double at = on_axis(point.measured_at);
    value.push_back({at, *point.classical->ewma});
    upper.push_back({at, *point.classical->ewma_upper});
    lower.push_back({at, *point.classical->ewma_lower});
  }
  flush();
}

void add_readings(Plot& plot, const Canvas& canvas) {
  std::vector<PlotPoint> line, dots;
  const auto flush = [&] {
    plot.line(line, "thread");
    line.clear();
  };
  for (const ChartPoint& point : canvas.points) {
    const PlotPoint at{on_axis(point.measured_at), point.value};
    if (point.starts_stretch) flush();
    line.push_back(at);
    if (!point.set_aside && point.signals.empty()) dots.push_back(at);
  }
  flush();
  plot.dots(dots, "dots");
}

void add_signals(Plot& plot, const ChartScene& scene, const Canvas& canvas) {
  constexpr double kWordRoom = 80;
  double last_word = -kWordRoom;
  for (const ChartPoint& point : canvas.points) {
    const PlotPoint at{on_axis(point.measured_at), point.value};
    const std::string when = time_words(point.measured_at) + ": " + with_unit(point.value, scene.style);
    if (point.set_aside && point.signals.empty())
      plot.shape(Shape::circle, at, "hollow", "set aside, " + when);
    if (point.signals.empty()) continue;
    plot.shape(mark_of(point.signals.front()).shape, at, "signal", signals_text(point) + ", " + when);
    if (plot.to_x(at.x) - last_word < kWordRoom) continue;
    last_word = plot.to_x(at.x);
    plot.words_at(at, signals_text(point), "signal-word");
  }
}

void add_marks(Plot& plot, const ChartView& view, bool flags) {
  for (std::size_t i = 0; i < view.marks.size(); ++i)
    plot.upright(on_axis(view.marks[i].at), "event", flags ? std::to_string(i + 1) : std::string());
}

/// Means of the readings before and from the estimated start of a change of level, in the present stretch.
struct TwoLevels {
  PlotPoint before_from, before_to, after_from, after_to;
};

std::optional<TwoLevels> two_levels(const ChartView& view, const Canvas& canvas) {
  if (view.state != ChartState::unstable || view.pattern == "scatter" || !view.change.started_at) return {};
  struct Side {
    double sum = 0, from = 0, to = 0;
    int count = 0;
    void add(const ChartPoint& point) {
      to = on_axis(point.measured_at);
      if (count++ == 0) from = to;
      sum += point.value;
    }
  } before, after;
  for (const ChartPoint& point : canvas.points) {
    if (point.starts_stretch) before = after = Side{};
    if (!point.set_aside) (point.measured_at < *view.change.started_at ? before : after).add(point);
  }
  if (before.count == 0 || after.count == 0) return {};
  const double low = before.sum / before.count, high = after.sum / after.count;
  return TwoLevels{{before.from, low}, {before.to, low}, {after.from, high}, {after.to, high}};
}

void add_centre(Plot& plot, const ChartView& view, const Canvas& canvas, int decimals) {
  if (const auto levels = two_levels(view, canvas)) {
    plot.line({levels->before_from, levels->before_to}, "centre");
    plot.line({levels->after_from, levels->after_to}, "centre");
    plot.across(levels->before_from.y, "none", shown(levels->before_from.y, decimals));
    plot.across(levels->after_from.y, "none", shown(levels->after_from.y, decimals));
  } else if (const auto centre = view.classical ? view.classical->center : view.baseline.center) {
    plot.across(*centre, "centre", shown(*centre, decimals));
  }
}

std::string draw_readings(const ChartScene& scene, const Canvas& canvas, const Figure& figure,
                          const std::string& id, FigureSize size) {
  const ChartView& view = scene.view;
  Plot plot(id, size, canvas.time, value_extent(view, canvas));
  plot.value_axis_y(title_or_id(scene.measurand.title, scene.measurand.id) + ", " + scene.style.unit);
  plot.time_axis_x(false);
  add_learning(plot, view, canvas);
  add_limits(plot, canvas);
  add_ewma(plot, canvas);
  const int decimals = scene.style.decimals;
  if (view.change.started_between && view.state == ChartState::unstable)
    plot.block(on_axis(view.change.started_between->first), on_axis(view.change.started_between->last),
               "doubt");
  if (view.reference) plot.across(view.reference->value, "reference");
  add_centre(plot, view, canvas, decimals);
  if (view.upper_limit) plot.across(*view.upper_limit, "none", shown(*view.upper_limit, decimals));
  if (view.lower_limit) plot.across(*view.lower_limit, "none", shown(*view.lower_limit, decimals));
  add_marks(plot, view, true);
  add_readings(plot, canvas);
  add_signals(plot, scene, canvas);
  return plot.svg(figure.heading, figure.summary);
}

std::string draw_ranges(const ChartScene& scene, const Canvas& canvas, const std::string& id,
                        FigureSize size) {
  std::vector<PlotPoint> bars;
  ExtentOf extent;
  extent.add(0);
  for (const ChartPoint& point : canvas.points) {
    if (!point.moving_range) continue;
    bars.push_back({on_axis(point.measured_at), *point.moving_range});
    extent.add(*point.moving_range);
  }
  const bool limited = scene.view.classical && scene.view.classical->moving_range_upper;
  const double limit = limited ? *scene.view.classical->moving_range_upper : 0;
  if (limited) extent.add(limit);
  Plot plot(id, size, canvas.time, {0, extent.padded(0.15).high});
  plot.value_axis_y("moving range", 2);
  plot.time_axis_x();
  add_marks(plot, scene.view, false);
  plot.bars(bars, "bars");
  const auto mean = scene.view.baseline.moving_range_mean;
  if (mean) plot.across(*mean, "centre", shown(*mean, scene.style.decimals));
  if (limited) plot.across(limit, "limit", shown(limit, scene.style.decimals));
  return plot.svg(
      "Moving ranges of " + scene.name(),
      mean ? "Mean moving range " + with_unit(*mean, scene.style) + "." : "No mean moving range yet.");
}

std::string draw_chart(const ChartScene& scene, const Canvas& canvas, const Figure& figure,
                       const std::string& id, FigureSize size) {
  return draw_readings(scene, canvas, figure, id, size) +
         draw_ranges(scene, canvas, id + ".ranges", {size.width, 105});
}

void add_legend(Figure& figure, const ChartScene& scene, const Canvas& canvas) {
  const ChartView& view = scene.view;
  figure.legend = {
      {legend_dot("dots"), "reading"},
      {legend_line("centre"), two_levels(view, canvas) ? "mean before and after the change" : "centre"},
      {legend_area("expected"),
       view.classical ? "within the limits" : "expected of a reading from those before it"}};
  if (scene.asked.classical.ewma_weight && view.classical)
    figure.legend.push_back({legend_line("fitted"), "EWMA"});
  std::set<ChartSignal> signals;
  bool aside = false;
  for (const ChartPoint& point : canvas.points) {
    if (!point.signals.empty()) signals.insert(point.signals.front());
    aside = aside || point.set_aside;
  }
  for (const ChartSignal signal : signals)
    figure.legend.push_back({legend_path("signal", mark_of(signal).sample), signal_words(signal)});
  if (aside)
    figure.legend.push_back({legend_path("hollow", "M8 8a5 5 0 1 0 10 0a5 5 0 1 0 -10 0Z"), "set aside"});
  figure.legend.push_back({legend_area("learning"), "baseline"});
  if (view.change.started_between && view.state == ChartState::unstable)
    figure.legend.push_back({legend_area("doubt"), "the change began within"});
  if (view.reference) figure.legend.push_back({legend_line("reference"), "reference value"});
  for (std::size_t i = 0; i < view.marks.size(); ++i)
    if (on_axis(view.marks[i].at) >= canvas.time.low)
      figure.legend.push_back({legend_line("event"), std::to_string(i + 1) + ": " +
                                                         mark_words(view.marks[i].what) + ", " +
                                                         time_words(view.marks[i].at)});
}

std::string reading_words(const ChartPoint& point, int decimals) {
  return shown(point.value, decimals) +
         (point.replicates > 1 ? " (mean of " + std::to_string(point.replicates) + ")" : "");
}

std::string cell(const std::optional<double>& value, int decimals) {
  return value ? shown(*value, decimals) : "";
}

void add_classical_table(Figure& figure, const ChartScene& scene, const Canvas& canvas) {
  const int decimals = scene.style.decimals;
  figure.table = {scene.name() + ", newest first",
                  {"measured at", "reading", "moving range", "EWMA", "sum above", "sum below", "signals"},
                  {}};
  for (auto point = canvas.points.rbegin(); point != canvas.points.rend(); ++point) {
    const ClassicalPoint judged = point->classical.value_or(ClassicalPoint{});
    figure.table.rows.push_back({time_words(point->measured_at), reading_words(*point, decimals),
                                 cell(point->moving_range, decimals), cell(judged.ewma, decimals),
                                 cell(judged.cusum_upper, 2), cell(judged.cusum_lower, 2),
                                 signals_text(*point)});
  }
}

void add_table(Figure& figure, const ChartScene& scene, const Canvas& canvas) {
  if (scene.view.classical) return add_classical_table(figure, scene, canvas);
  const int decimals = scene.style.decimals;
  figure.table = {
      scene.name() + ", newest first",
      {"measured at", "reading", "moving range", "change score", "precision score", "signals", "use"},
      {}};
  for (auto point = canvas.points.rbegin(); point != canvas.points.rend(); ++point)
    figure.table.rows.push_back({time_words(point->measured_at), reading_words(*point, decimals),
                                 point->moving_range ? shown(*point->moving_range, decimals) : "",
                                 point->score ? shown(*point->score, 2) : "",
                                 point->precision_score ? shown(*point->precision_score, 2) : "",
                                 signals_text(*point), point->set_aside ? "set aside" : "learned"});
}

}  // namespace

Figure control_chart_figure(const ChartScene& scene, FigureDetail detail) {
  Figure figure;
  figure.id =
      "chart." + id_part(scene.analyzer) + "." + id_part(scene.standard) + "." + id_part(scene.measurand.id);
  figure.heading = scene.standard + ", " + title_or_id(scene.measurand.title, scene.measurand.id) +
                   (scene.view.lot.empty() ? "" : ", lot " + scene.view.lot);
  figure.summary = chart_words(scene);
  if (scene.view.points.empty()) return figure;
  const bool full = detail == FigureDetail::full;
  const Canvas canvas = canvas_of(scene.view, full ? scene.view.points.size() : kSmallChartFigure);
  figure.drawing = draw_chart(scene, canvas, figure, figure.id, {360, full ? 220.0 : 190.0});
  if (full) figure.wide = draw_chart(scene, canvas, figure, figure.id + ".wide", {960, 320});
  add_legend(figure, scene, canvas);
  add_table(figure, scene, canvas);
  if (!full) keep_newest(figure.table, kSmallTable);
  return figure;
}

}  // namespace agreed
