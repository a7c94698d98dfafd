#include "core/chart/aftermath.hpp"

#include <cmath>
#include <limits>

#include "core/chart/explanation.hpp"
#include "core/chart/level_score.hpp"
#include "core/chart/precision_score.hpp"

namespace agreed {
namespace {
// Log-likelihood units within which lasting scatter explains as well as a shift that has ended.
constexpr double kNearlyAsWell = 4;

// The readings in three parts: before the start, the deviating part (B), and the return after it.
struct Parts {
  Sums before, deviating, returned;
  [[nodiscard]] Sums normal() const { return before + returned; }  // (A)
};

// One way of cutting the readings for every end of the deviating part that leaves `clear_after` behind it,
// and `cut(position, parts)` for each. Sums of the return run backwards from the newest reading, so that a
// gross reading in the deviating part leaves no rounding error in the others.
template <class Cut>
Sums for_each_end(const Stretch& stretch, const Prefix& start, int clear_after, Cut cut) {
  const double* deviation = stretch.deviation();
  const std::size_t held = stretch.held();
  const std::size_t from = stretch.first_split(start.sums.n);
  // Readings since the start that are no longer held one by one.
  Sums since = stretch.prefix(from).sums - start.sums;
  const std::size_t first = since.n > 0 ? from : from + 1;

  std::vector<Sums> returned(held - from + 1);
  for (std::size_t j = held; j > from; --j) {
    returned[j - 1 - from] = returned[j - from];
    returned[j - 1 - from].add(deviation[j], stretch.within(j));
  }
  for (std::size_t j = from; j <= held; ++j) {
    if (j > from) since.add(deviation[j], stretch.within(j));
    if (j >= first && j + static_cast<std::size_t>(clear_after) <= held)
      cut(j, Parts{start.sums, since, returned[j - from]});
  }
  return since;
}

double log_run(double run_length) {
  return std::log(run_length);
}

struct Ended {
  bool any = false;
  std::size_t position = 0;
  double value = 0;  // R_end or l_end
};

class LevelRule {
 public:
  LevelRule(const Stretch& stretch, const Prefix& start, const AftermathLimits& limits)
      : limits_(limits), n_(static_cast<double>(stretch.counted())), carried_(stretch.carried().squares) {
    floor_ = std::max((n_ - 2) * stretch.least_variance(), std::numeric_limits<double>::min());
    const Sums since = for_each_end(stretch, start, limits.clear_after, [&](std::size_t j, const Parts& p) {
      possible_ = true;
      const double rest = held_up(p.normal().about_mean() + p.deviating.about_mean());
      if (!ended_.any || rest < ended_.value) ended_ = {true, j, rest};
    });
    lasting_ = held_up(start.sums.about_mean() + since.about_mean());
    whole_ = held_up((start.sums + since).about_mean());
  }

  /// Have enough readings come since the start for anything to have ended? Before that the score of a gross
  /// reading falls without saying anything (unconfirmed), and lasting scatter would explain it best.
  [[nodiscard]] bool can_end() const { return possible_; }
  [[nodiscard]] bool has_ended() const {
    return ended_.any && n_ / 2 * std::log(lasting_ / ended_.value) >= log_run(limits_.level_run_length);
  }
  /// Does the deviating part differ enough to be set aside?
  [[nodiscard]] bool sets_aside() const {
    if (!ended_.any) return false;
    const double t = std::sqrt((n_ - 2) * std::max(0.0, whole_ - ended_.value) / ended_.value);
    return level_score_exceeds(t, static_cast<std::int64_t>(n_), limits_.level_limit);
  }
  [[nodiscard]] double gain() const { return sets_aside() ? n_ / 2 * std::log(whole_ / ended_.value) : 0.0; }
  [[nodiscard]] std::size_t position() const { return ended_.position; }

 private:
  [[nodiscard]] double held_up(double squares) const { return std::max(floor_, squares + carried_); }

  AftermathLimits limits_;
  double n_, carried_, floor_ = 0, lasting_ = 0, whole_ = 0;
  bool possible_ = false;
  Ended ended_;
};

class PrecisionRule {
 public:
  PrecisionRule(const Stretch& stretch, const Prefix& start, const AftermathLimits& limits)
      : limits_(limits), by_replicates_(stretch.by_replicates()), carried_(stretch.carried()) {
    const double least = by_replicates_ ? stretch.least_variance_within() : stretch.least_variance();
    floor_ = std::max(least, std::numeric_limits<double>::min());
    const Sums since = for_each_end(stretch, start, limits.clear_after, [&](std::size_t j, const Parts& p) {
      possible_ = true;
      if (!tells(p.deviating) || !(variance(scatter(p.deviating)) > variance(normal(p.normal())))) return;
      const double likelihood = part(normal(p.normal())) + part(scatter(p.deviating));
      if (!ended_.any || likelihood > ended_.value) ended_ = {true, j, likelihood};
    });
    lasting_ = part(normal(start.sums)) + part(scatter(since));
    whole_ = part(normal(start.sums + since));
  }

  [[nodiscard]] bool can_end() const { return possible_; }
  [[nodiscard]] bool has_ended() const {
    return ended_.any && ended_.value - lasting_ >= log_run(limits_.precision_run_length);
  }
  [[nodiscard]] bool sets_aside() const {
    const double h = limits_.precision_limit;
    return ended_.any && ended_.value - whole_ >= h * h / 2;
  }
  [[nodiscard]] std::size_t position() const { return ended_.position; }

 private:
  // What is compared: readings about their mean, or replicates about their run's.
  struct Scatter {
    double n = 0, squares = 0;
  };
  [[nodiscard]] Scatter scatter(const Sums& sums) const {
    if (by_replicates_) return {static_cast<double>(sums.within.degrees), sums.within.squares};
    return {static_cast<double>(sums.n), sums.about_mean()};
  }
  /// With what earlier lots of the standard left.
  [[nodiscard]] Scatter normal(const Sums& sums) const {
    const Scatter own = scatter(sums);
    if (by_replicates_)
      return {own.n + static_cast<double>(carried_.within.degrees), own.squares + carried_.within.squares};
    return {own.n + static_cast<double>(carried_.degrees), own.squares + carried_.squares};
  }
  [[nodiscard]] bool tells(const Sums& sums) const {
    return sums.n >= 2 && (!by_replicates_ || sums.within.degrees > 0);
  }
  [[nodiscard]] double variance(const Scatter& s) const {
    return s.n > 0 ? std::max(floor_, s.squares / s.n) : floor_;
  }
  [[nodiscard]] double part(const Scatter& s) const { return -s.n / 2 * std::log(variance(s)); }

  AftermathLimits limits_;
  bool by_replicates_;
  Carried carried_;
  double floor_ = 0, lasting_ = 0, whole_ = 0;
  bool possible_ = false;
  Ended ended_;
};

Aftermath judge_level(const Stretch& stretch, const Prefix& start, const AftermathLimits& limits,
                      std::vector<float>& scratch) {
  const LevelRule rule(stretch, start, limits);
  if (!rule.can_end()) return {};
  const bool confirmed = level_score_exceeds(best_level_split(stretch).t, stretch.counted(),
                                             limits.level_limit - kConfirmedWithin);
  if (confirmed && !rule.has_ended()) return {};

  const Aftermath ends = rule.sets_aside() ? Aftermath{Outcome::ends_setting_aside, rule.position()}
                                           : Aftermath{Outcome::ends, 0};
  const Explanation scatter = explain_by_two_normals(stretch);
  if (scatter.gain > rule.gain()) {
    const bool scatters = has_precision_splits(stretch) &&
                          best_precision_split(stretch, scratch).score > limits.precision_limit;
    if (scatters) return {Outcome::becomes_scatter, scatter.position};
  }
  return scatter.gain > rule.gain() - kNearlyAsWell ? Aftermath{} : ends;
}

Aftermath judge_precision(const Stretch& stretch, const Prefix& start, const AftermathLimits& limits,
                          std::vector<float>& scratch) {
  const PrecisionRule rule(stretch, start, limits);
  if (!rule.can_end()) return {};
  const bool confirmed = has_precision_splits(stretch) && best_precision_split(stretch, scratch).score >=
                                                              limits.precision_limit - kConfirmedWithin;
  if (confirmed && !rule.has_ended()) return {};
  return rule.sets_aside() ? Aftermath{Outcome::ends_setting_aside, rule.position()}
                           : Aftermath{Outcome::ends, 0};
}
}  // namespace

Aftermath judge_aftermath(const Stretch& stretch, const Prefix& start, EndingRule rule,
                          const AftermathLimits& limits, std::vector<float>& scratch) {
  return rule == EndingRule::level ? judge_level(stretch, start, limits, scratch)
                                   : judge_precision(stretch, start, limits, scratch);
}

}  // namespace agreed
