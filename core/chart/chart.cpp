// The fold: readings and interventions in, findings out. What is told about a change is in
// chart_finding.cpp, what is shown in chart_view.cpp.
#include "core/chart/chart.hpp"

#include <algorithm>
#include <cmath>
#include <stdexcept>

#include "core/base/rfc3339.hpp"
#include "core/chart/chart_state.hpp"
#include "core/chart/moving_range.hpp"

namespace agreed {
namespace {
// Serial correlation is not estimated from fewer readings.
constexpr std::int64_t kCorrelationFrom = 15;

const char* name(InterventionKind kind) {
  switch (kind) {
    case InterventionKind::recalibrated:
      return "recalibrated";
    case InterventionKind::repaired:
      return "repaired";
    case InterventionKind::consumable_changed:
      return "consumable_changed";
    case InterventionKind::level_accepted:
      return "level_accepted";
    case InterventionKind::noted:
      return "noted";
  }
  return "";
}

void refuse_earlier(Instant at, std::optional<Instant> newest) {
  if (newest && at < *newest)
    throw std::invalid_argument("at: expected no earlier than " + to_rfc3339(*newest) + ", got " +
                                to_rfc3339(at));
}
}  // namespace

Chart::State::State(const Settings& all, ChartIndex at)
    : settings(&all),
      index(at),
      level(limit_for(Score::level, chart().level_run_length)),
      precision(limit_for(Score::precision, chart().precision_run_length)),
      stretch(new_stretch()) {
  if (chart().method == ChartMethod::classical) classical.emplace(classical::Fold(chart()));
}

Stretch Chart::State::new_stretch() const {
  const std::optional<int> decimals = measurand().decimals;
  return {chart().split_memory, decimals ? std::optional(std::pow(10.0, -*decimals)) : std::nullopt};
}

std::size_t Chart::State::lot_at(Instant at) const {
  const std::vector<Lot>& lots = chart().lots;
  std::size_t found = 0;
  for (std::size_t i = 1; i < lots.size(); ++i)
    if (lots[i].from && *lots[i].from <= at) found = i;
  return found;
}

double Chart::State::mean_of(const Sums& sums) const {
  return stretch.reference() + sums.sum / static_cast<double>(sums.n);
}

double Chart::State::sd_of(const Sums& sums) const {
  return std::sqrt(std::max(stretch.least_variance(), sums.about_mean() / static_cast<double>(sums.n - 1)));
}

Repeatability Chart::State::repeatability() const {
  const Prefix known = learned();
  const std::int64_t n = known.sums.n;
  if (n < kLeastForRepeatability || (n < kOwnRepeatabilityFrom && before_stretch.known()))
    return before_stretch;
  const double sigma = known.ranges / static_cast<double>(n - 1) / kD2;
  return {known.at, std::max(sigma * sigma, stretch.least_variance()), moving_range_degrees_of_freedom(n),
          mean_of(known.sums)};
}

void Chart::State::remember_repeatability(Instant at) {
  Repeatability now = repeatability();
  now.at = at;
  history.push_back(now);
  if (history.size() > kPointsKept) {
    history.pop_front();
    history_cut = true;
  }
}

void Chart::State::remember(const PointRecord& record) {
  points.push_back(record);
  ++points_seen;
  if (points.size() > kPointsKept) points.pop_front();
}

PointRecord* Chart::State::point(std::int64_t number) {
  const std::int64_t first = points_seen - static_cast<std::int64_t>(points.size());
  return number < first ? nullptr : &points[static_cast<std::size_t>(number - first)];
}

// Marks older than every point shown are of no use; the newest began the present stretch and stays.
void Chart::State::mark(Instant at, const std::string& what) {
  marks.push_back({at, what});
  const auto old = [this](const StretchMark& m) { return points.size() > 0 && m.at < points[0].at; };
  marks.erase(std::remove_if(marks.begin(), marks.end() - 1, old), marks.end() - 1);
  if (marks.size() > kPointsKept) marks.erase(marks.begin());
}

void Chart::State::begin_stretch(Instant at, const std::string& what, std::vector<Finding>& findings) {
  before_stretch = repeatability();
  if (alarm) findings.push_back(ceased(at, "new_stretch", 0));
  alarm.reset();
  if (classical) restart_classical(at, findings);
  stretch = new_stretch();
  set_aside = 0;
  stretch_begins = true;
  mark(at, what);
}

// The readings since the estimated start are the first of the new stretch.
void Chart::State::accept_level(Instant at, std::vector<Finding>& findings) {
  if (!alarm) return begin_stretch(at, name(InterventionKind::level_accepted), findings);
  const Stretch old = stretch;
  const Change change = describe();
  begin_stretch(change.started_at, name(InterventionKind::level_accepted), findings);
  findings.back().at = at;
  for (std::size_t j = change.position + 1; j <= old.held(); ++j) {
    const Prefix reading = old.prefix(j);
    PointRecord* shown = point(reading.point);
    stretch.append(reading.at, old.reference() + reading.deviation, reading.point);
    if (shown && stretch_begins) shown->starts_stretch = true;
    stretch_begins = false;
  }
}

void Chart::State::open(EndingRule rule, std::size_t position, const char* pattern,
                        std::vector<Finding>& findings) {
  alarm = Alarm{rule, pattern, {}, stretch.prefix(position), 0, {}};
  alarm->score = score_of(rule);
  const Change change = describe();
  alarm->started_at = change.started_at;
  findings.push_back(finding(change));
}

void Chart::State::test(PointRecord& record, std::vector<Finding>& findings) {
  const std::int64_t n = stretch.count();
  if (!has_level_splits(stretch)) return;
  const LevelSplit best = best_level_split(stretch);
  record.t = best.t;
  std::optional<PrecisionSplit> scatter;
  if (has_precision_splits(stretch)) scatter = best_precision_split(stretch, scratch);
  if (scatter) record.precision_score = scatter->score;
  if (alarm) return;

  const bool up = best.t > 0;
  if (level_score_exceeds(best.t, n, level.h) &&
      (n < kCorrelationFrom || holds_with_serial_correlation(stretch, best, level.h)))
    record.level_signal = best.single() ? (up ? ChartSignal::single_high : ChartSignal::single_low)
                                        : (up ? ChartSignal::shift_up : ChartSignal::shift_down);
  record.scatter_signal = scatter && scatter->score > precision.h;
  if (record.level_signal)
    open(EndingRule::level, best.position, best.single() ? "single_reading" : "shift", findings);
  else if (record.scatter_signal)
    open(EndingRule::precision, scatter->position, "scatter", findings);
}

// One more reading while the alert is open.
void Chart::State::follow_up(const PointRecord& record, std::vector<Finding>& findings) {
  ++alarm->readings;
  const AftermathLimits limits{chart().clear_after, level.h, precision.h, chart().level_run_length,
                               chart().precision_run_length};
  const Aftermath aftermath = judge_aftermath(stretch, alarm->start, alarm->rule, limits, scratch);
  switch (aftermath.outcome) {
    case Outcome::stays:
      break;
    case Outcome::becomes_scatter:
      alarm->rule = EndingRule::precision;
      alarm->score = score_of(alarm->rule);
      alarm->start = stretch.prefix(aftermath.position);
      break;
    case Outcome::ends:
    case Outcome::ends_setting_aside:
      return close(aftermath, record.at, findings);
  }
  if (alarm->readings != kPatternFrom) return;
  const Change change = describe();
  if (change.pattern == alarm->pattern && change.started_at == alarm->started_at) return;
  alarm->pattern = change.pattern;
  alarm->started_at = change.started_at;
  findings.push_back(finding(change));
}

void Chart::State::close(const Aftermath& aftermath, Instant at, std::vector<Finding>& findings) {
  std::int64_t taken = 0;
  if (aftermath.outcome == Outcome::ends_setting_aside) {
    // Numbers of points run on, also through readings no longer held one by one.
    const std::int64_t last = stretch.prefix(aftermath.position).point;
    const std::int64_t oldest = points_seen - static_cast<std::int64_t>(points.size());
    for (std::int64_t number = std::max(alarm->start.point + 1, oldest); number <= last; ++number)
      point(number)->set_aside = true;
    taken = stretch.set_aside(alarm->start, aftermath.position);
    set_aside += taken;
  }
  findings.push_back(ceased(at, "back_to_normal", taken));
  alarm.reset();
}

Chart::Chart(const Settings& settings, ChartIndex index) : state_(std::make_unique<State>(settings, index)) {}
Chart::~Chart() = default;
Chart::Chart(Chart&&) noexcept = default;
Chart& Chart::operator=(Chart&&) noexcept = default;
Chart::Chart(const Chart& other) : state_(std::make_unique<State>(*other.state_)) {}
Chart& Chart::operator=(const Chart& other) {
  if (this != &other) state_ = std::make_unique<State>(*other.state_);
  return *this;
}

void Chart::State::follow_lot(Instant at, std::vector<Finding>& findings) {
  const std::size_t now = lot_at(at);
  if (lot && *lot != now) {
    const Lot& next = chart().lots[now];
    begin_stretch(next.from.value_or(at), "lot " + next.id, findings);
  }
  lot = now;
}

// Appends the reading to the stretch and remembers its point, with what was known before it.
PointRecord& Chart::State::take(Instant at, double value) {
  PointRecord record;
  record.at = at;
  record.value = value;
  record.starts_stretch = stretch_begins;
  stretch_begins = false;
  const Prefix known = learned(), previous = stretch.last();
  record.learned = known.sums.n;
  if (known.sums.n >= kLeastForLimits) {
    record.mean = mean_of(known.sums);
    record.sd = sd_of(known.sums);
  }
  stretch.append(at, value, points_seen);
  if (previous.sums.n > 0) record.moving_range = std::abs(stretch.last().deviation - previous.deviation);
  record.count = stretch.count();
  remember(record);
  return points[points.size() - 1];
}

void Chart::add(const CheckReading& reading, std::vector<Finding>& findings) {
  State& s = *state_;
  refuse_earlier(reading.measured_at, s.newest);
  if (!std::isfinite(reading.value)) throw std::invalid_argument("value: expected a finite reading");
  s.newest = reading.measured_at;
  s.follow_lot(reading.measured_at, findings);
  PointRecord& point = s.take(reading.measured_at, reading.value);
  if (s.classical) {
    s.judge_by_limits(reading.measured_at, {&reading.value, 1}, findings);
    return s.remember_repeatability(reading.measured_at);
  }
  const bool open = s.alarm.has_value();
  s.test(point, findings);
  if (open) s.follow_up(point, findings);
  s.remember_repeatability(reading.measured_at);
}

void Chart::add(const Intervention& intervention, std::vector<Finding>& findings) {
  State& s = *state_;
  refuse_earlier(intervention.at, s.newest);
  const ChartSettings& chart = s.chart();
  if (intervention.analyzer != chart.analyzer || intervention.kind == InterventionKind::noted ||
      intervention.standard.value_or(chart.standard) != chart.standard ||
      intervention.measurand.value_or(chart.measurand) != chart.measurand)
    return;
  s.newest = intervention.at;
  if (intervention.kind == InterventionKind::level_accepted)
    s.accept_level(intervention.at, findings);
  else
    s.begin_stretch(intervention.at, name(intervention.kind), findings);
  s.remember_repeatability(intervention.at);
}

std::optional<Instant> Chart::last_at() const {
  return state_->newest;
}

Repeatability Chart::repeatability() const {
  const SlidingArray<Repeatability>& history = state_->history;
  return history.size() > 0 ? history.back() : Repeatability{};
}

std::optional<Repeatability> Chart::repeatability_at(Instant at) const {
  const auto kept = state_->history.all();
  const auto after = std::upper_bound(kept.begin(), kept.end(), at,
                                      [](Instant t, const Repeatability& r) { return t < r.at; });
  if (after != kept.begin()) return *(after - 1);
  return state_->history_cut ? std::nullopt : std::optional(Repeatability{});
}

void Chart::conditions(std::vector<Finding>& findings) const {
  if (state_->alarm) findings.push_back(state_->finding(state_->describe()));
  if (state_->classical && state_->classical->fold.alarm()) findings.push_back(state_->classical_finding());
}

ChartState Chart::state() const {
  if (state_->classical) return state_->classical->fold.state();
  if (state_->alarm) return ChartState::unstable;
  return state_->stretch.count() < state_->chart().baseline ? ChartState::learning : ChartState::stable;
}

}  // namespace agreed
