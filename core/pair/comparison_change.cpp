#include "core/pair/comparison_change.hpp"

#include <algorithm>
#include <iterator>

#include "core/pair/comparison_state.hpp"

namespace agreed {
namespace {
using State = Comparison::State;
constexpr double kHardlyBelow = 0.9;  // as far below its limit a signal still counts as confirmed
constexpr std::size_t kSamplesListed = 1000;

struct Sides {
  Moments before, after;
  std::int64_t first_after = 0;  ///< number of that pair
};

// The newest `after` accepted pairs, and up to `before` of those just before them.
Sides sides_of(const State& state, std::int64_t before, std::int64_t after) {
  std::vector<Point> before_points, after_points;
  std::int64_t first_after = state.pairs_total + 1;
  for (auto recent = state.recent.rbegin(); recent != state.recent.rend(); ++recent) {
    if (recent->outcome != PairOutcome::accepted) continue;
    const Point point{recent->pair.x, recent->pair.y};
    if (after-- > 0) {
      after_points.push_back(point);
      first_after = recent->serial;
    } else if (before-- > 0) {
      before_points.push_back(point);
    } else {
      break;
    }
  }
  return {Moments(before_points), Moments(after_points), first_after};
}

Moments accepted_from(const State& state, std::int64_t serial) {
  std::vector<Point> points;
  for (const RecentPair& recent : state.recent)
    if (recent.serial >= serial && recent.outcome == PairOutcome::accepted)
      points.push_back({recent.pair.x, recent.pair.y});
  return Moments(points);
}

// The newest pair before `at`, as far as pairs are kept.
std::optional<PairMark> newest_before(const State& state, Instant at) {
  for (auto recent = state.recent.rbegin(); recent != state.recent.rend(); ++recent)
    if (recent->pair.at < at) return PairMark{recent->pair.at, recent->serial};
  std::int64_t serial = state.pairs_total - static_cast<std::int64_t>(state.recent.size());
  for (auto older = state.older.rbegin(); older != state.older.rend(); ++older, --serial)
    if (older->at < at) return PairMark{older->at, serial};
  return std::nullopt;
}

std::optional<Split> split_now(const State& state) {
  if (!state.ratio.known) return std::nullopt;
  const auto evidence = DriftAlarm::evidence(state.chart, state.deltas());
  const double least = std::max(0.0, state.alarm.limits().warning - kHardlyBelow);
  const bool confirmed = evidence && *evidence >= evidence_of_score(least);
  if (!state.alarm.open() && !confirmed) return std::nullopt;
  auto split = state.chart.best_split(state.deltas()[0]);
  return !split && state.alarm.open() ? std::optional(state.alarm.split()) : split;
}

std::optional<PairSplit> pair_split(const State& state) {
  if (state.alarm.open() == Severity::critical) {
    const RememberedStart& start = *state.restarted;
    return PairSplit{start.since,
                     start.started_at,
                     start.started_between,
                     start.before,
                     accepted_from(state, start.first_after),
                     state.deltas()[0]};
  }
  const auto split = split_now(state);
  if (!split) return std::nullopt;
  const Sides sides = sides_of(state, split->before, split->after);
  return PairSplit{state.stretch_from.value_or(Instant::min()),
                   split->started_at,
                   split->started_between,
                   sides.before,
                   sides.after,
                   state.deltas()[0]};
}

// Samples of the pairs after number `serial`, the newest 1,000 of them.
std::vector<std::string> samples_after(const State& state, std::int64_t serial) {
  const auto all = static_cast<std::size_t>(state.pairs_total - serial);
  const std::size_t wanted = std::min(all, kSamplesListed);
  std::vector<std::string> samples;
  samples.reserve(wanted);
  const std::size_t of_recent = std::min(wanted, state.recent.size());
  const std::size_t of_older = std::min(wanted - of_recent, state.older.size());
  for (std::size_t i = state.older.size() - of_older; i < state.older.size(); ++i)
    samples.push_back(state.older[i].sample);
  for (std::size_t i = state.recent.size() - of_recent; i < state.recent.size(); ++i)
    samples.push_back(state.recent[i].pair.sample);
  return samples;
}

LookBackView look_back(const State& state, const std::optional<PairMark>& last_good) {
  LookBackView view;
  view.from_agreement = last_good.has_value();
  view.from = last_good ? last_good->at : state.first_pair_at.value_or(Instant{});
  view.to = state.recent.empty() ? view.from : state.recent.back().pair.at;
  const std::int64_t serial = last_good ? last_good->serial : 0;
  view.pairs = state.pairs_total - serial;
  view.samples = samples_after(state, serial);
  view.hours = std::chrono::duration<double, std::ratio<3600>>(view.to - view.from).count();
  return view;
}
}  // namespace

std::optional<PairMark> last_agreement_before(const State& state, Instant at) {
  const auto run = state.agreement.run_before(at);
  if (!run) return std::nullopt;
  if (run->last.at < at) return run->last;
  // The run goes on past that moment.
  return newest_before(state, at).value_or(run->first);
}

RememberedStart remember_start(const State& state) {
  const Split& split = state.alarm.split();
  const Sides sides = sides_of(state, split.before, split.after);
  return {split.started_at,  split.started_between,
          sides.before,      state.stretch_from.value_or(Instant::min()),
          sides.first_after, last_agreement_before(state, split.started_between.first)};
}

bool Comparison::changed() const {
  return state_->alarm.open() || state_->lost;
}

std::optional<ComparisonChange> Comparison::change() const {
  if (!changed()) return std::nullopt;
  const State& state = *state_;
  ComparisonChange change;
  change.split = pair_split(state);
  if (state.alarm.open() == Severity::critical)
    change.look_back = look_back(state, state.restarted->last_agreement);
  else
    change.look_back = look_back(
        state,
        last_agreement_before(state, change.split ? change.split->started_between.first : Instant::max()));
  return change;
}

}  // namespace agreed
