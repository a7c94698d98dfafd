#include "core/plan/notice.hpp"

#include <algorithm>
#include <cmath>
#include <stdexcept>
#include <utility>
#include <vector>

#include "core/base/budget_entries.hpp"
#include "core/plan/weakest_change.hpp"

namespace agreed::plan {
namespace {
using std::chrono::hours;
using std::chrono::minutes;

constexpr int kMostReadings = 5'000;
constexpr double kLeastRunLength = 100, kShortRunLength = 1'000;
constexpr double kStronger = 1.1;      // steps between run lengths, and between sds
constexpr double kLargerShift = 1.05;  // between shifts
constexpr double kLeastSdFactor = 0.05, kWidestShift = 20;
constexpr int kPlainPortion = 10;
// The plain simulation ends early when it is clear that the median will not be reached.
constexpr int kEnoughToGiveUp = 50;
constexpr double kClearlyUnnoticed = 5;
constexpr Duration kIntervals[] = {hours(168),  hours(72),   hours(48),   hours(24),  hours(12),  hours(8),
                                   hours(6),    hours(4),    hours(3),    hours(2),   hours(1),   minutes(30),
                                   minutes(20), minutes(15), minutes(10), minutes(5), minutes(2), minutes(1)};

/// What a remedy changes; the rest stays.
struct Change {
  std::optional<Duration> every;
  std::optional<double> run_length;
  double sd_factor = 1, shift_factor = 1;
};

/// A chart or a comparison as the search sees it.
struct Watched {
  Duration every{};
  double run_length = 0;  ///< of the main score
  bool own = false, adjustable = true;
  double least_run_length = kLeastRunLength;
  std::function<Trial(const Change&)> trial;
  std::function<bool(const Change&)> overspends;  ///< whether others are left no share of the allowance
};

int readings_within(Duration within, Duration every) {
  return static_cast<int>(std::min<std::int64_t>(within / every, kMostReadings));
}

BudgetShares shares_of(const Settings& settings) {
  return share_alarm_budget(settings.alarm_budget.allowed_per_year, chart_entries(settings),
                            comparison_entries(settings));
}

template <class Item>
bool overspends(const Settings& settings, std::vector<Item> Settings::*items, std::size_t index,
                const Change& change) {
  Settings changed = settings;
  Item& item = (changed.*items).at(index);
  if (change.every) item.every = *change.every;
  if (change.run_length) item.own_run_length = change.run_length;
  return shares_of(changed).overspent;
}

/// The settings of an item as a change leaves them: at another cadence a share makes another run length.
template <class Item>
Settings changed_settings(const Settings& settings, std::vector<Item> Settings::*items, std::size_t index,
                          const Change& change) {
  Settings changed = settings;
  Item& item = (changed.*items).at(index);
  if (change.every) item.every = *change.every;
  const bool shared = change.every && !item.own_run_length;
  if (change.run_length) item.own_run_length = change.run_length;
  if (!shared && !change.run_length) return changed;
  // What becomes of the others does not matter here: only this item is simulated.
  apply_budget(shares_of(changed), changed);
  return changed;
}

Watched watched_chart(const Settings& settings, ChartIndex index, double sd, int before, double shift) {
  const ChartSettings& chart = settings.of(index);
  Watched watched;
  watched.every = chart.every;
  watched.run_length = chart.level_run_length;
  watched.own = chart.own_run_length.has_value();
  watched.adjustable = chart.method == ChartMethod::change_point;
  watched.trial = [=](const Change& change) {
    return chart_trial(changed_settings(settings, &Settings::charts, index.value, change), index,
                       {shift * change.shift_factor, sd * change.sd_factor, before});
  };
  watched.overspends = [=](const Change& change) {
    return overspends(settings, &Settings::charts, index.value, change);
  };
  return watched;
}

Watched watched_comparison(const Settings& settings, ComparisonIndex index, const PairConditions& conditions,
                           int before, double shift) {
  const ComparisonSettings& comparison = settings.of(index);
  Watched watched;
  watched.every = comparison.every;
  watched.run_length = comparison.warning_run_length;
  watched.own = comparison.own_run_length.has_value();
  // Scatter is tested once a window, so its run length, twice the warning's, must be longer than that.
  watched.least_run_length = std::max(kLeastRunLength, std::floor(comparison.window_pairs / 2.0) + 1);
  watched.trial = [=](const Change& change) {
    return pair_trial(changed_settings(settings, &Settings::comparisons, index.value, change), index,
                      conditions.with_errors(change.sd_factor), {shift * change.shift_factor, before});
  };
  watched.overspends = [=](const Change& change) {
    return overspends(settings, &Settings::comparisons, index.value, change);
  };
  return watched;
}

/// `first`, then each by `factor` stronger, to `last` at most.
std::vector<double> grid(double first, double last, double factor) {
  std::vector<double> values;
  const int steps = static_cast<int>(std::floor(std::log(last / first) / std::log(factor) + 1e-9));
  for (int i = 0; i <= steps; ++i) values.push_back(first * std::pow(factor, i));
  return values;
}

void require_valid(const NoticeWish& wish) {
  if (!std::isfinite(wish.shift) || !(std::abs(wish.shift) > 0))
    throw std::invalid_argument("shift: expected a finite one that is not 0");
  if (wish.within <= Duration::zero()) throw std::invalid_argument("within: expected a positive time");
}
}  // namespace

struct NoticeSearch::State {
  /// One remedy: its values, weakest first, what each changes, and what becomes of the one found.
  struct Remedy {
    WeakestChange search;
    std::function<void(int, Simulated)> keep;
  };

  State(const Settings& all, Watched what, const NoticeWish& wanted, const Trials& asked)
      : settings(all), watched(std::move(what)), wish(wanted), trials(asked) {
    require_valid(wish);
    notice.readings = readings_within(wish.within, watched.every);
    Trials plain_trials = trials;
    plain_trials.horizon = std::min(kMostReadings, std::max(trials.horizon, notice.readings));
    plain.emplace(watched.trial({}), plain_trials);
  }

  Settings settings;
  Watched watched;
  NoticeWish wish;
  Trials trials;
  Notice notice;
  std::optional<TrialRun> plain;
  std::vector<std::function<Remedy()>> to_try;  ///< after the plain simulation
  std::optional<Remedy> trying;
  std::size_t tried = 0;

  [[nodiscard]] bool gives_up() const {
    const int made = plain->waits().trials(), unnoticed = plain->waits().unnoticed();
    return made >= kEnoughToGiveUp && 2 * unnoticed - made > kClearlyUnnoticed * std::sqrt(made);
  }

  void conclude_plain() {
    const Waits& waits = plain->waits();
    notice.share = waits.noticed_within(notice.readings);
    notice.median = waits.median();
    if (notice.median) notice.median_time = watched.every * static_cast<std::int64_t>(notice.median->value);
    notice.met = notice.readings > 0 && notice.share.value >= noticed_share;
    plain.reset();
    if (notice.readings > 0) to_try.emplace_back([this] { return by_shift(); });
    if (!notice.met) {
      to_try.emplace_back([this] { return by_every(); });
      to_try.emplace_back([this] { return by_run_length(); });
      to_try.emplace_back([this] { return by_sd(); });
    }
    next();
  }

  void next() {
    trying.reset();
    if (tried < to_try.size())
      trying.emplace(to_try[tried]());
    else
      notice.first = first();
  }

  void step() {
    if (plain) {
      bool more = true;
      for (int i = 0; i < kPlainPortion && more; ++i) more = plain->step();
      if (!more || gives_up()) conclude_plain();
    } else if (!trying->search.step()) {
      if (const auto found = trying->search.found()) trying->keep(*found, trying->search.share());
      ++tried;
      next();
    }
  }

  /// A search among changes within the time wished.
  [[nodiscard]] WeakestChange among(std::vector<Change> changes) const {
    const auto count = static_cast<int>(changes.size());
    const auto make = [what = watched, within = wish.within, changes = std::move(changes)](int i) {
      const Change& change = changes[static_cast<std::size_t>(i)];
      const int readings = readings_within(within, change.every.value_or(what.every));
      return Candidate{readings > 0 ? what.trial(change) : Trial(), readings};
    };
    return {count, make, trials};
  }

  Remedy by_shift() {
    const std::vector<double> factors =
        notice.met ? grid(1 / kWidestShift, 1, kLargerShift) : grid(1, kWidestShift, kLargerShift);
    std::vector<Change> changes;
    changes.reserve(factors.size());
    for (const double factor : factors) changes.push_back({{}, {}, 1, factor});
    return {among(std::move(changes)), [this, factors](int i, Simulated) {
              notice.shift = std::abs(wish.shift) * factors[static_cast<std::size_t>(i)];
            }};
  }

  Remedy by_every() {
    std::vector<Duration> intervals;
    std::vector<Change> changes;
    for (const Duration every : kIntervals)
      if (every < watched.every) {
        intervals.push_back(every);
        changes.push_back({every, {}, 1, 1});
      }
    return {among(std::move(changes)), [this, intervals](int i, Simulated share) {
              const Duration every = intervals[static_cast<std::size_t>(i)];
              notice.every = EveryRemedy{every, share, watched.overspends({every, {}, 1, 1})};
            }};
  }

  Remedy by_run_length() {
    std::vector<double> lengths;
    if (watched.adjustable && watched.run_length > watched.least_run_length)
      for (const double factor : grid(1, watched.run_length / watched.least_run_length, kStronger))
        if (factor > 1) lengths.push_back(std::floor(watched.run_length / factor));
    std::vector<Change> changes;
    changes.reserve(lengths.size());
    for (const double length : lengths) changes.push_back({{}, length, 1, 1});
    return {among(std::move(changes)), [this, lengths](int i, Simulated share) {
              notice.run_length = remedy_of(lengths[static_cast<std::size_t>(i)], share);
            }};
  }

  Remedy by_sd() {
    std::vector<double> factors;
    std::vector<Change> changes;
    for (const double factor : grid(kStronger, 1 / kLeastSdFactor, kStronger)) {
      factors.push_back(1 / factor);
      changes.push_back({{}, {}, 1 / factor, 1});
    }
    return {among(std::move(changes)), [this, factors](int i, Simulated share) {
              notice.sd = SdRemedy{factors[static_cast<std::size_t>(i)], share};
            }};
  }

  [[nodiscard]] RunLengthRemedy remedy_of(double length, Simulated share) const {
    RunLengthRemedy remedy;
    remedy.in_control_run_length = length;
    remedy.per_year = readings_per_year(watched.every) / length;
    remedy.short_one = length < kShortRunLength;
    remedy.share = share;
    const double allowed = settings.alarm_budget.allowed_per_year;
    remedy.overspends = watched.overspends({{}, length, 1, 1});
    if (watched.own) return remedy;
    const double taken = shares_of(settings).taken_per_year;
    // The share grows as the run length shrinks: both parts of a share that matter here are one half.
    static_assert(score_part == warning_part);
    const double larger = watched.run_length / length;
    remedy.false_alerts_per_year = taken + (allowed - taken) * larger;
    return remedy;
  }

  [[nodiscard]] FirstRemedy first() const {
    if (notice.met) return FirstRemedy::not_needed;
    if (notice.run_length && !notice.run_length->short_one) return FirstRemedy::run_length;
    if (notice.every) return FirstRemedy::every;
    if (notice.run_length) return FirstRemedy::run_length;
    return notice.sd ? FirstRemedy::sd : FirstRemedy::none;
  }

  [[nodiscard]] double share_done() const {
    constexpr double of_plain = 0.3;
    if (plain) return of_plain * plain->share_done();
    if (!trying) return 1;
    const double remedies = static_cast<double>(tried) + trying->search.share_done();
    return of_plain + (1 - of_plain) * remedies / static_cast<double>(to_try.size());
  }
};

NoticeSearch::NoticeSearch(const Settings& settings, ChartIndex chart, double sd, int before,
                           const NoticeWish& wish, const Trials& trials)
    : state_(std::make_unique<State>(settings, watched_chart(settings, chart, sd, before, wish.shift), wish,
                                     trials)) {}

NoticeSearch::NoticeSearch(const Settings& settings, ComparisonIndex comparison,
                           const PairConditions& conditions, int before, const NoticeWish& wish,
                           const Trials& trials)
    : state_(std::make_unique<State>(
          settings, watched_comparison(settings, comparison, conditions, before, wish.shift), wish, trials)) {
}

NoticeSearch::~NoticeSearch() = default;
NoticeSearch::NoticeSearch(NoticeSearch&&) noexcept = default;
NoticeSearch& NoticeSearch::operator=(NoticeSearch&&) noexcept = default;

bool NoticeSearch::step() {
  if (!state_->plain && !state_->trying) return false;
  state_->step();
  return state_->plain || state_->trying;
}

double NoticeSearch::share_done() const {
  return state_->share_done();
}

const Notice& NoticeSearch::notice() const {
  return state_->notice;
}

}  // namespace agreed::plan
