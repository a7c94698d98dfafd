#include "daemon/render/page_chart_words.hpp"

#include <algorithm>
#include <cmath>

#include "daemon/render/page_words.hpp"

namespace agreed {
namespace {

std::string score_words(const std::optional<double>& score, double limit) {
  return score ? shown(*score, 2) + " of " + shown(limit, 2) : "not yet given";
}

std::string learned_words(const ChartScene& scene) {
  const BaselineView& base = scene.view.baseline;
  std::string out = counted(base.readings, "reading", "readings") + " learned";
  if (base.center) out += ", centre " + with_unit(*base.center, scene.style);
  if (base.sd) out += ", sd " + with_unit(*base.sd, scene.style);
  if (base.set_aside > 0) out += ", " + std::to_string(base.set_aside) + " set aside";
  return out;
}

// A classical chart: what it found, by what limits, and how often those call falsely.
std::string classical_state_words(const ChartScene& scene) {
  const ChartView& view = scene.view;
  if (view.state == ChartState::learning)
    return "Learning: " + std::to_string(view.baseline.readings) + " of " +
           std::to_string(view.baseline.needed) + " readings of the baseline; nothing is judged before.";
  if (view.state == ChartState::stable) return "Stable.";
  const std::string begun = beginning_words(view.classical->alarm_started_at, {});
  if (view.pattern == "scatter") return "Unstable: the readings scatter more; begun " + begun + ".";
  std::string out = view.pattern == "single_reading" ? "Unstable: a single reading stands off"
                                                     : "Unstable: the level shifted";
  if (view.classical->shift)
    out += " by " + shown_signed(*view.classical->shift, scene.style.decimals) + " " + scene.style.unit;
  return out + "; begun " + begun + ".";
}

std::string classical_words(const ChartScene& scene) {
  const ClassicalView& view = *scene.view.classical;
  std::string out = classical_state_words(scene);
  if (scene.view.lower_limit && scene.view.upper_limit)
    out += " Limits " + shown(*scene.view.lower_limit, scene.style.decimals) + " to " +
           with_unit(*scene.view.upper_limit, scene.style) + ", centre " +
           with_unit(*view.center, scene.style) +
           (view.sigma_given ? ", from an earlier study."
                             : ", from the " + counted(scene.view.baseline.readings, "reading", "readings") +
                                   " of the baseline.");
  if (const double length = scene.asked.expected.readings; length > 0)
    out += " What was chosen calls falsely about every " + shown(length, 0) + " readings.";
  return out;
}

std::string unstable_words(const ChartScene& scene) {
  const ChartView& view = scene.view;
  const std::string begun = beginning_words(view.change.started_at, view.change.started_between);
  if (view.pattern == "scatter") {
    std::string out = "Unstable: the readings scatter more";
    if (view.precision.ratio_of_sd)
      out += ", " + shown(*view.precision.ratio_of_sd, 1) + " times the sd before";
    return out + "; begun " + begun + ".";
  }
  std::string out = view.pattern == "single_reading" ? "Unstable: a single reading stands off"
                                                     : "Unstable: the level shifted";
  if (view.change.shift)
    out += " by " + shown_signed(*view.change.shift, scene.style.decimals) + " " + scene.style.unit;
  return out + "; begun " + begun + ".";
}

}  // namespace

std::string state_words(ChartState state) {
  switch (state) {
    case ChartState::stable:
      return "stable";
    case ChartState::unstable:
      return "unstable";
    case ChartState::learning:
      break;
  }
  return "learning";
}

std::string signal_words(ChartSignal signal) {
  std::string words = to_string(signal);
  std::replace(words.begin(), words.end(), '_', ' ');
  if (signal == ChartSignal::ewma) return "EWMA";
  return signal == ChartSignal::cusum ? "cumulative sum" : words;
}

std::string chart_words(const ChartScene& scene) {
  const ChartView& view = scene.view;
  if (view.points.empty()) return "No reading yet. The chart begins with its first reading.";
  if (view.classical) return classical_words(scene);
  std::string out;
  if (view.state == ChartState::unstable)
    out = unstable_words(scene) + " " + learned_words(scene) + ".";
  else if (view.state == ChartState::learning)
    out = "Learning: " + std::to_string(view.baseline.readings) + " of " +
          std::to_string(view.baseline.needed) + " readings; it calls out from the fifth reading on. " +
          learned_words(scene) + ".";
  else
    out = "Stable: " + learned_words(scene) + ".";
  if (view.lower_limit && view.upper_limit)
    out += " The next reading is expected between " + shown(*view.lower_limit, scene.style.decimals) +
           " and " + with_unit(*view.upper_limit, scene.style) + ".";
  return out + " Change score " + score_words(view.change.score, view.change.limit_now) + ".";
}

std::string precision_words(const ChartScene& scene) {
  const ChartView& view = scene.view;
  std::string out;
  if (!view.classical)
    out = "Precision score " + score_words(view.precision.score, view.precision.limit) + ".";
  else if (view.classical->moving_range_upper)
    out = "Moving ranges up to " + with_unit(*view.classical->moving_range_upper, scene.style) +
          " are within their limit.";
  if (view.baseline.sigma)
    out += " Short-term sigma " + with_unit(*view.baseline.sigma, scene.style) +
           " from the mean moving range" +
           (view.baseline.sigma_degrees_of_freedom
                ? " on " + shown(*view.baseline.sigma_degrees_of_freedom, 1) + " degrees of freedom."
                : ".");
  return out;
}

std::string reference_words(const ChartScene& scene) {
  if (!scene.view.reference) return {};
  const ReferenceView& reference = *scene.view.reference;
  std::string out = "Reference value " + with_unit(reference.value, scene.style);
  if (reference.expanded_uncertainty)
    out += " \u00b1 " + shown(*reference.expanded_uncertainty, scene.style.decimals) + " (coverage factor " +
           shortest(reference.coverage_factor) + ")";
  if (reference.bias) out += "; bias " + shown_signed(*reference.bias, scene.style.decimals);
  if (reference.normalised_error) out += ", normalised error " + shown(*reference.normalised_error, 2);
  if (reference.allowed_bias)
    out += "; up to " + with_unit(*reference.allowed_bias, scene.style) + " is allowed for";
  return out + (reference.biased ? ". Biased." : ".");
}

std::string replicates_words(const ChartScene& scene) {
  if (!scene.view.replicates) return {};
  const ReplicatesView& replicates = *scene.view.replicates;
  std::string out = "Points are means of runs of replicates (" + shown(replicates.per_run, 1) +
                    " a run); sd within runs " + with_unit(replicates.within_sd, scene.style);
  if (replicates.between_sd) out += ", between runs " + with_unit(*replicates.between_sd, scene.style);
  return out + ".";
}

std::string censored_words(const ChartScene& scene) {
  const std::int64_t count = scene.view.censored;
  if (count == 0) return {};
  return counted(static_cast<int>(count), "result only says", "results only say") +
         " \"below\" or \"above\"; kept, and left out of this chart.";
}

std::string effects_words(const ChartScene& scene) {
  const auto difference = [&](const EffectView& effect) {
    std::string out = shown_signed(effect.difference, scene.style.decimals) + " " + scene.style.unit;
    if (effect.low && effect.high)
      out += " (95 % interval " + shown_signed(*effect.low, scene.style.decimals) + " to " +
             shown_signed(*effect.high, scene.style.decimals) + ")";
    return out;
  };
  const auto beside = [&](const EffectView& effect) {
    return effect.allowable ? "; allowable difference " + with_unit(*effect.allowable, scene.style) + "."
                            : ".";
  };
  std::string out;
  if (const auto& effect = scene.view.intervention_effect)
    out = "Since " + spaced(effect->what) + " (" + time_words(effect->at) + ") the mean is " +
          difference(*effect) + " from the mean before it, over " +
          counted(static_cast<int>(effect->readings_after), "reading", "readings") + beside(*effect);
  if (const auto& first = scene.view.since_first)
    out += (out.empty() ? "" : " ") +
           ("Against the first stretch of this lot it is " + difference(*first) + beside(*first));
  return out;
}

}  // namespace agreed
