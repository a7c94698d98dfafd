#include "tests/daemon/render/page_plant.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <random>

namespace agreed::mill {
namespace {
using namespace std::chrono;

const Instant kBegin{sys_days{year{2026} / January / 5} + hours(6)};

/// Normal numbers that are the same everywhere.
class Dice {
 public:
  explicit Dice(unsigned seed) : engine_(seed) {}
  double uniform() { return (static_cast<double>(engine_()) + 0.5) / 4294967296.0; }
  double normal(double sd) {
    return sd * std::sqrt(-2 * std::log(uniform())) * std::cos(2 * std::numbers::pi * uniform());
  }

 private:
  std::mt19937 engine_;
};

double to_step(double value) {
  return std::round(value * 100) / 100;
}

std::shared_ptr<Settings> plain_settings() {
  auto settings = std::make_shared<Settings>();
  settings->site = "Harrow Mill";
  settings->analyzers = {{"line1", "NIR analyzer, packing line 1"},
                         {"line2", "NIR analyzer, packing line 2"}};
  settings->measurands = {
      {"moisture", "Moisture", "g/100 g", std::nullopt, {14.5}, AllowableDifference{0.25, std::nullopt}},
      {"protein", "Protein", "g/100 g", 2, {10.5, 13.0}, AllowableDifference{0.20, 1.5}}};
  settings->standards = {{"wheat-high", "Wheat, high protein"}, {"wheat-low", "Wheat, low protein"}};
  for (std::uint32_t a = 0; a < 2; ++a)
    for (std::uint32_t s = 0; s < 2; ++s)
      for (std::uint32_t m = 0; m < 2; ++m) {
        ChartSettings chart;
        chart.analyzer = {a};
        chart.standard = {s};
        chart.measurand = {m};
        settings->charts.push_back(chart);
      }
  for (std::uint32_t m = 0; m < 2; ++m) {
    ComparisonSettings comparison;
    comparison.id = settings->measurands[m].id;
    comparison.measurand = {m};
    comparison.x = {0};
    comparison.y = {1};
    settings->comparisons.push_back(comparison);
  }
  return settings;
}

struct Moments {
  double n = 0, x = 0, y = 0, xx = 0, xy = 0, yy = 0;
};

Moments moments(const std::vector<PairView>& pairs, std::size_t from, std::size_t to) {
  Moments m;
  for (std::size_t i = from; i < to; ++i) {
    m.n += 1;
    m.x += pairs[i].x;
    m.y += pairs[i].y;
  }
  m.x /= m.n;
  m.y /= m.n;
  for (std::size_t i = from; i < to; ++i) {
    const double dx = pairs[i].x - m.x, dy = pairs[i].y - m.y;
    m.xx += dx * dx;
    m.xy += dx * dy;
    m.yy += dy * dy;
  }
  return m;
}

/// Least squares and t = 1.66: good enough to look at.
struct Line {
  double intercept, slope, sd, half_width;
};

Line line_through(const Moments& m) {
  const double slope = m.xy / m.xx;
  const double sd = std::sqrt(std::max(m.yy - slope * m.xy, 1e-9) / (m.n - 2));
  return {m.y - slope * m.x, slope, sd, 1.66 * sd / std::sqrt(m.n)};
}

void fill_view(ComparisonView& view, const Measurand& measurand, std::size_t window_from) {
  const std::size_t count = view.pairs.size();
  const Line line = line_through(moments(view.pairs, window_from, count));
  view.pairs_total = static_cast<std::int64_t>(count);
  view.window.pairs = static_cast<int>(count - window_from);
  view.window.capacity = 200;
  view.window.from = view.pairs[window_from].measured_at;
  view.window.to = view.pairs.back().measured_at;
  FitView fit;
  fit.intercept = line.intercept;
  fit.slope = line.slope;
  fit.intercept_interval = {line.intercept - 0.09, line.intercept + 0.09};
  fit.slope_interval = {line.slope - 0.008, line.slope + 0.008};
  view.fit = fit;
  view.error = {0.81, 0.4, 1.6, 0.018, 0.020, 17.9, 17.9, "check_standards", "", {}};
  DifferenceView d;
  const Moments m = moments(view.pairs, window_from, count);
  d.mean = m.y - m.x;
  d.sd = line.sd;
  d.mean_interval = {d.mean - line.half_width, d.mean + line.half_width};
  d.lower_limit = d.mean - 1.96 * d.sd;
  d.upper_limit = d.mean + 1.96 * d.sd;
  d.lower_limit_interval = {d.lower_limit - 2 * line.half_width, d.lower_limit + 2 * line.half_width};
  d.upper_limit_interval = {d.upper_limit - 2 * line.half_width, d.upper_limit + 2 * line.half_width};
  d.within_count = static_cast<int>(m.n) - 1;
  d.within_of = static_cast<int>(m.n);
  d.within_interval = {0.91, 1.0};
  view.difference = d;
  view.scatter = ScatterView{line.sd, 0.027, 1.08, 0.3, false};
  view.range = RangeView{0.999, true, true};
  for (std::size_t i = 0; i < count; ++i) {
    PairView& pair = view.pairs[i];
    pair.in_window = i >= window_from;
    pair.residual = (pair.y - line.intercept - line.slope * pair.x) / line.sd;
  }
  for (std::size_t i = std::min<std::size_t>(20, count); i <= count; ++i) {
    const std::size_t from = i > window_from + 7 ? window_from : 0;
    const Line then = line_through(moments(view.pairs, from, i));
    BiasPoint point{view.pairs[i - 1].measured_at, {}};
    for (const double level : measurand.decision_levels) {
      const double bias = then.intercept + (then.slope - 1) * level;
      point.levels.push_back({bias, bias - 1.5 * then.half_width, bias + 1.5 * then.half_width});
    }
    view.bias_history.push_back(point);
  }
  for (std::size_t k = 0; k < measurand.decision_levels.size(); ++k) {
    LevelView level;
    level.level = measurand.decision_levels[k];
    const auto& [bias, low, high] = view.bias_history.back().levels[k];
    level.bias = bias;
    level.se = (high - low) / 3.3;
    level.low = low;
    level.high = high;
    const double a = measurand.allowable->at(level.level);
    level.allowable = a;
    level.verdict = low > -a && high < a   ? Verdict::agreement_shown
                    : low > a || high < -a ? Verdict::disagreement_shown
                                           : Verdict::inconclusive;
    const double share = 0.5 * std::erfc((bias - a) / line.sd / std::numbers::sqrt2) -
                         0.5 * std::erfc((bias + a) / line.sd / std::numbers::sqrt2);
    level.single_result = SingleResultView{share, bias - 2 * line.sd, bias + 2 * line.sd};
    view.levels.push_back(level);
  }
}

std::shared_ptr<ComparisonView> comparison(const Measurand& measurand, std::uint32_t index, int pairs,
                                           double drift, unsigned seed) {
  Dice dice(seed);
  auto view = std::make_shared<ComparisonView>();
  view->index = {index};
  const double low = measurand.id == "protein" ? 9.6 : 12.8, span = measurand.id == "protein" ? 4.2 : 2.6;
  for (int i = 0; i < pairs; ++i) {
    const double level = low + span * dice.uniform();
    const double moved = i > pairs * 8 / 10 ? drift * (0.7 + 0.3 * (i - pairs * 0.8) / (pairs * 0.2)) : 0.0;
    PairView pair;
    pair.sample = "S-" + std::to_string(1000 + i);
    pair.measured_at = kBegin + hours(2) * i;
    pair.x = to_step(level + dice.normal(0.02));
    pair.y = to_step(level + 0.008 + moved + dice.normal(0.022));
    view->pairs.push_back(pair);
  }
  if (pairs < 3) return view;
  const bool restart = drift > 0;
  if (pairs > 100) view->pairs[60].outlier = true;
  if (pairs > 100) view->pairs[60].y += 0.31;
  fill_view(*view, measurand, restart ? static_cast<std::size_t>(pairs * 8 / 10 + 1) : 0);
  view->pair_chart = {PairChartState::stable, pairs, 1.3, 4.31, 4.83, 14600, false, {}, {}, {}};
  if (pairs < 20) {
    view->verdict = Verdict::gathering;
    for (LevelView& level : view->levels) level.verdict = Verdict::gathering;
    return view;
  }
  view->verdict = restart ? Verdict::disagreement_shown : Verdict::agreement_shown;
  const auto at = view->pairs[static_cast<std::size_t>(restart ? pairs * 8 / 10 + 12 : 42)].measured_at;
  view->verdict_since = at;
  if (pairs > 100) view->outliers.push_back({view->pairs[60].sample, view->pairs[60].measured_at, 8.7, 1e-9});
  if (!restart) return view;
  view->last_agreement = at - hours(30);
  view->pair_chart.state = PairChartState::unstable;
  view->pair_chart.score = 7.9;
  view->pair_chart.severity = Severity::critical;
  view->pair_chart.started_at = at - hours(24);
  view->pair_chart.started_between = Period{at - hours(34), at - hours(20)};
  view->window.since_intervention = view->pair_chart.started_at;
  view->warnings = {"error_grows_with_level"};
  return view;
}

void finish_chart(ChartView& view, double drift) {
  double mean = 0, squares = 0, ranges = 0;
  int n = 0;
  for (ChartPoint& point : view.points) {
    if (point.starts_stretch) n = 0, mean = 0, squares = 0, ranges = 0;
    if (n >= 4) {
      const double s = std::sqrt(squares / (n - 1)),
                   width = (4.1 + 30.0 / n / n) * s * std::sqrt(1 + 1.0 / n);
      point.upper = mean + width;
      point.lower = mean - width;
      point.score = std::abs(point.value - mean) / s;
    }
    if (point.set_aside) continue;
    ++n;
    const double delta = point.value - mean;
    mean += delta / n;
    squares += delta * (point.value - mean);
    ranges += point.moving_range.value_or(0);
  }
  view.baseline.readings = n;
  view.baseline.center = mean;
  if (n < 2) return;
  const double s = std::sqrt(squares / (n - 1));
  view.baseline.sd = s;
  view.baseline.sigma = ranges / (n - 1) / 1.12838;
  view.baseline.sigma_degrees_of_freedom = 0.62 * (n - 1);
  view.baseline.moving_range_mean = ranges / (n - 1);
  view.upper_limit = mean + 4.3 * s;
  view.lower_limit = mean - 4.3 * s;
  view.state = n >= 30 ? ChartState::stable : ChartState::learning;
  view.change = {0.9, 4.08, 4.08, 3650, false, {}, {}, {}};
  view.precision = {0.4, 3.62, 3650, false, {}};
  if (n < 30) view.warnings = {"baseline_short"};
  if (drift <= 0) return;
  view.state = ChartState::unstable;
  view.pattern = "shift";
  view.change.score = 6.2;
  view.change.shift = drift;
  view.change.started_at = view.points[view.points.size() - 15].measured_at;
  view.change.started_between = Period{view.points[view.points.size() - 19].measured_at,
                                       view.points[view.points.size() - 13].measured_at};
}

std::shared_ptr<ChartView> chart(const ChartSettings& asked, std::uint32_t index, int readings, double drift,
                                 unsigned seed) {
  Dice dice(seed);
  auto view = std::make_shared<ChartView>();
  view->index = {index};
  view->lot = "2026-A";
  const bool protein = asked.measurand.value == 1, high = asked.standard.value == 0;
  const double level = protein ? (high ? 13.24 : 10.62) : (high ? 13.9 : 14.4);
  for (int i = 0; i < readings; ++i) {
    ChartPoint point;
    point.measured_at = kBegin + hours(8) * i;
    point.starts_stretch = i == 0 || i == 31;
    const bool moved = drift > 0 && i >= readings - 15;
    point.value = to_step(level + (moved ? drift : 0.0) + (i < 31 ? 0.0 : 0.02) + dice.normal(0.021));
    if (i == 48) point.value += 0.17;
    if (i == 48) point.signals.push_back(ChartSignal::single_high);
    if (i == 48) point.set_aside = true;
    if (moved && i == readings - 12) point.signals.push_back(ChartSignal::shift_up);
    if (!point.starts_stretch) point.moving_range = std::abs(point.value - view->points.back().value);
    view->points.push_back(point);
  }
  if (readings > 31) view->marks = {{kBegin + hours(8) * 30 + hours(5), "consumable_changed"}};
  if (readings > 48) view->baseline.set_aside = 1;
  if (protein && high) view->reference = ReferenceView{13.22, 0.08, 2, 0.013, 0.16, {}, false};
  if (readings > 0) finish_chart(*view, drift);
  return view;
}

}  // namespace

Story story(int pairs, int readings, double drift) {
  Story out;
  Snapshot& snapshot = out.snapshot;
  const auto settings = plain_settings();
  snapshot.settings = settings;
  snapshot.started_at = kBegin;
  snapshot.at = kBegin + hours(2) * std::max(pairs, 1) + minutes(3);
  snapshot.config_sha256 = "5f3c0a9be1d24477";
  snapshot.started = snapshot.ready = true;
  AnalyzerStatus status;
  status.inbox.reachable = true;
  if (readings > 0) status.last_reading_at = snapshot.at - minutes(14);
  snapshot.analyzers = {status, status};
  for (std::uint32_t i = 0; i < settings->charts.size(); ++i) {
    const ChartSettings& asked = settings->charts[i];
    const bool moves = asked.analyzer.value == 1 && asked.measurand.value == 1;
    snapshot.charts.push_back(chart(asked, i, readings, moves ? drift : 0, 100 + i));
  }
  for (std::uint32_t i = 0; i < 2; ++i)
    snapshot.comparisons.push_back(comparison(settings->measurands[i], i, pairs, i == 1 ? drift : 0, 7 + i));
  return out;
}

Alert alert_of(std::int64_t id, AlertKind kind, Severity severity, Instant at) {
  Alert alert;
  alert.id = id;
  alert.kind = kind;
  alert.severity = severity;
  alert.opened_at = alert.changed_at = at;
  return alert;
}

}  // namespace agreed::mill
