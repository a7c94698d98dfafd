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

// What run means scatter, at `share` = mean of 1/replicates, and how replicates scatter within their runs,
// make the error of one reading.
void split_variance(Repeatability& of_means, const Within& within, double least, double share) {
  const auto within_df = static_cast<double>(within.degrees);
  const double variance = std::max(within.squares / within_df, least);
  const double rest = (1 - share) * variance, means = of_means.variance;
  of_means.within_variance = variance;
  of_means.within_degrees_of_freedom = within_df;
  of_means.variance = means + rest;
  if (means + rest > variance)
    of_means.degrees_of_freedom = (means + rest) * (means + rest) /
                                  (means * means / of_means.degrees_of_freedom + rest * rest / within_df);
  else {
    of_means.variance = variance;
    of_means.degrees_of_freedom = within_df;
  }
}

ChartSignal signal_of(const LevelSplit& split) {
  const bool up = split.t > 0;
  if (split.single()) return up ? ChartSignal::single_high : ChartSignal::single_low;
  return up ? ChartSignal::shift_up : ChartSignal::shift_down;
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
      stretch(new_stretch({}, -1)) {
  if (chart().method == ChartMethod::classical) classical = ClassicalPart{classical::Fold(chart()), {}, {}};
}

Stretch Chart::State::new_stretch(const Carried& carried, std::int64_t point_before) const {
  const std::optional<int> decimals = measurand().decimals;
  return {chart().split_memory, decimals ? std::optional(std::pow(10.0, -*decimals)) : std::nullopt, carried,
          point_before};
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
  const double squares = sums.about_mean() + stretch.carried().squares;
  return std::sqrt(std::max(stretch.least_variance(), squares / static_cast<double>(degrees_of(sums))));
}

Repeatability Chart::State::repeatability() const {
  const Prefix known = learned();
  const Carried& carried = stretch.carried();
  const std::int64_t ranges = carried.range_count + std::max<std::int64_t>(known.sums.n - 1, 0);
  const std::int64_t n = ranges + 1;
  if (n < kLeastForRepeatability || (n < kOwnRepeatabilityFrom && before_stretch.known()))
    return before_stretch;
  const double sigma = (known.ranges + carried.ranges) / static_cast<double>(ranges) / kD2;
  Repeatability now;
  now.at = known.at;
  now.mean = mean_of(known.sums.n > 0 ? known.sums : stretch.last().sums);
  now.variance = std::max(sigma * sigma, stretch.least_variance());
  now.degrees_of_freedom = moving_range_degrees_of_freedom(n);
  const Within within = known.sums.within + carried.within;
  if (within.degrees < kLeastWithin) return now;
  const double share = (known.shares + carried.shares) / static_cast<double>(known.sums.n + carried.runs);
  split_variance(now, within, stretch.least_variance_within(), share);
  return now;
}

Carried Chart::State::carry() const {
  const Prefix known = learned();
  Carried carried = stretch.carried();
  carried.degrees = degrees_of(known.sums);
  carried.squares += known.sums.about_mean();
  carried.range_count += std::max<std::int64_t>(known.sums.n - 1, 0);
  carried.ranges += known.ranges;
  carried.shares += known.shares;
  carried.runs += known.sums.n;
  carried.within = carried.within + known.sums.within;
  carried.step = known.step;
  carried.within_step = known.within_step;
  return carried;
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

void Chart::State::begin_stretch(Instant at, const std::string& what, const Carried& carried,
                                 std::vector<Finding>& findings) {
  if (carried.runs == 0) before_stretch = repeatability();
  if (alarm) findings.push_back(calmed(at, "new_stretch", 0));
  if (biased) findings.push_back(ceased(AlertKind::check_standard_biased, at, "new_stretch"));
  alarm.reset();
  if (classical) restart_classical(at, findings);
  biased = false;
  stretch = new_stretch(carried, points_seen - 1);
  set_aside = 0;
  stretch_begins = true;
  mark(at, what);
}

// The level just before an intervention, and that of the first stretch: what came after is compared with
// them. A shift that stands is the level just before; `change`: the one that is accepted, then its readings
// are what comes after. A stretch of one reading has no level to compare with, the one before it stays.
void Chart::State::keep_levels(const StretchMark& next, const std::optional<Change>& accepted) {
  intervention = next;
  const std::optional<MeanLevel> known =
      accepted ? level_of(stretch.prefix(accepted->position)) : level_of(learned());
  if (known && !first_level && known->readings >= kLeastForEffect) first_level = known;
  std::optional<MeanLevel> now = known;
  if (alarm && !accepted) {
    const Change change = describe();
    if (change.pattern == "shift" && change.before.n > 0) {
      const std::int64_t degrees = stretch.counted() - 2;
      const double squares =
          change.before.about_mean() + change.after.about_mean() + stretch.carried().squares;
      now = MeanLevel{change.started_at,
                      stretch.last().at,
                      change.after.n,
                      mean_of(change.after),
                      std::max(squares / static_cast<double>(degrees), stretch.least_variance()),
                      degrees};
    }
  }
  if (now) level_before = now;
}

// The readings since the estimated start are the first of the new stretch.
void Chart::State::accept_level(Instant at, std::vector<Finding>& findings) {
  const char* what = name(InterventionKind::level_accepted);
  if (!alarm) {
    keep_levels({at, what}, {});
    return begin_stretch(at, what, {}, findings);
  }
  const Stretch old = stretch;
  const Change change = describe();
  keep_levels({change.started_at, what}, change);
  const std::size_t told = findings.size();
  begin_stretch(change.started_at, what, {}, findings);
  for (std::size_t i = told; i < findings.size(); ++i) findings[i].at = at;
  for (std::size_t j = change.position + 1; j <= old.held(); ++j) {
    const Prefix reading = old.prefix(j);
    PointRecord* shown = point(reading.point);
    stretch.append(old.run_at(reading), reading.point);
    if (shown && stretch_begins) shown->starts_stretch = true;
    stretch_begins = false;
  }
}

void Chart::State::open(EndingRule rule, std::size_t position, const char* pattern,
                        std::vector<Finding>& findings) {
  alarm = Alarm{rule, pattern, {}, stretch.prefix(position), 0, {}};
  alarm->score = score_of(rule);
  alarm->limit = rule == EndingRule::level ? level_limit(stretch.count()) : precision.h;
  const Change change = describe();
  alarm->started_at = change.started_at;
  findings.push_back(finding(change));
}

void Chart::State::test(PointRecord& record, std::vector<Finding>& findings) {
  const std::int64_t n = stretch.count();
  std::optional<LevelSplit> level_split;
  if (has_level_splits(stretch)) level_split = best_level_split(stretch);
  if (level_split) record.t = level_split->t;
  std::optional<PrecisionSplit> scatter;
  if (has_precision_splits(stretch)) scatter = best_precision_split(stretch, scratch);
  if (scatter) record.precision_score = scatter->score;
  if (alarm) return;

  const double limit = level_limit(n);
  if (level_split && level_score_exceeds(level_split->t, level_split->counted, limit) &&
      (n < kCorrelationFrom || holds_with_serial_correlation(stretch, *level_split, limit)))
    record.level_signal = signal_of(*level_split);
  record.scatter_signal = scatter && scatter->score > precision.h;
  if (record.level_signal)
    open(EndingRule::level, level_split->position, level_split->single() ? "single_reading" : "shift",
         findings);
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
      alarm->limit = precision.h;
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
  findings.push_back(calmed(at, "back_to_normal", taken));
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
    // Levels of two lots have nothing to do with each other.
    first_level.reset();
    level_before.reset();
    begin_stretch(next.from.value_or(at), "lot " + next.id, carry(), findings);
  }
  lot = now;
}

// The table of run lengths holds where every reading adds one degree of freedom. Runs of replicates add d,
// and their splits are less alike: at the limit for a run length of 479 such charts call after 471, 403, 342
// and 304 runs with d = 1, 2, 4 and 9 (simulated, standard errors 9 to 12). Asked for (2 - 1/d) times the run
// length, they keep at least the one promised.
void Chart::State::adapt_precision_limit() {
  std::int64_t degrees = 1;
  if (stretch.by_replicates()) {
    const Carried& carried = stretch.carried();
    const auto within = static_cast<double>(stretch.last().sums.within.degrees + carried.within.degrees);
    degrees = std::max(std::llround(within / static_cast<double>(stretch.count() + carried.runs)), 1LL);
  }
  if (degrees == precision_degrees) return;
  precision_degrees = degrees;
  const double factor = 2 - 1 / static_cast<double>(degrees);
  precision = limit_for(Score::precision, factor * chart().precision_run_length);
}

// Appends the reading to the stretch and remembers its point, with what was known before it.
PointRecord& Chart::State::take(const Run& run) {
  PointRecord record;
  record.at = run.at;
  record.value = run.mean;
  record.replicates = run.replicates;
  record.within_squares = run.squares;
  record.starts_stretch = stretch_begins;
  stretch_begins = false;
  const Prefix known = learned(), previous = stretch.last();
  record.learned = known.sums.n;
  if (has_limits(known.sums)) {
    record.degrees = degrees_of(known.sums);
    record.mean = mean_of(known.sums);
    record.sd = sd_of(known.sums);
  }
  stretch.append(run, points_seen);
  adapt_precision_limit();
  if (previous.sums.n > 0) record.moving_range = std::abs(stretch.last().deviation - previous.deviation);
  record.counted = stretch.counted();
  remember(record);
  return points[points.size() - 1];
}

void Chart::State::judge_bias(Instant at, std::vector<Finding>& findings) {
  const std::optional<ReferenceValue>& reference = present_lot().reference;
  if (!reference) return;
  const auto mean = compared_mean();
  // What is told is taken back only where a little less would be allowed for, so that it does not come and
  // go.
  const double h = biased ? level.h - kConfirmedWithin : level.h;
  const auto allowed = mean ? allowed_bias(*mean, *reference, h) : std::nullopt;
  const bool exceeds = allowed && std::abs(mean->mean - reference->value) > *allowed;
  if (exceeds == biased) return;
  biased = exceeds;
  findings.push_back(biased ? bias_finding()
                            : ceased(AlertKind::check_standard_biased, at, "back_to_normal"));
}

void Chart::add(std::span<const CheckReading> run, std::vector<Finding>& findings) {
  State& s = *state_;
  if (run.empty()) throw std::invalid_argument("run: expected at least one reading");
  const Instant at = run.front().measured_at;
  refuse_earlier(at, s.newest);
  if (s.points.size() > 0 && s.points.back().at == at)
    throw std::invalid_argument("measured_at: a run of " + to_rfc3339(at) + " was folded already");
  for (const CheckReading& reading : run) {
    if (!std::isfinite(reading.value)) throw std::invalid_argument("value: expected a finite reading");
    if (reading.measured_at != at) throw std::invalid_argument("measured_at: expected one time in a run");
  }
  s.newest = at;
  s.follow_lot(at, findings);
  PointRecord& point = s.take(run_of(run));
  if (s.classical) {
    s.judge_by_limits(run, findings);
    s.judge_bias(at, findings);
    return s.remember_repeatability(at);
  }
  const bool open = s.alarm.has_value();
  s.test(point, findings);
  if (open) s.follow_up(point, findings);
  s.judge_bias(at, findings);
  s.remember_repeatability(at);
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
  else {
    s.keep_levels({intervention.at, name(intervention.kind)}, {});
    s.begin_stretch(intervention.at, name(intervention.kind), {}, findings);
  }
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
  if (state_->biased) findings.push_back(state_->bias_finding());
}

ChartState Chart::state() const {
  if (state_->classical) return state_->classical->fold.state();
  if (state_->alarm) return ChartState::unstable;
  return state_->stretch.count() < state_->chart().baseline ? ChartState::learning : ChartState::stable;
}

}  // namespace agreed
