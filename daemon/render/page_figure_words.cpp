// What each figure of a comparison shows, in words: its caption, and its description for a screen reader.
#include <cmath>
#include <map>

#include "daemon/render/page_words.hpp"

namespace agreed {
namespace {

std::string pm(const ComparisonScene& scene, double allowable) {
  return "\u00b1" + with_unit(allowable, scene.style);
}

std::string small_p(double p) {
  return p < 0.001 ? "below 0.001" : shown(p, 3);
}

}  // namespace

std::string level_words(const ComparisonScene& scene, const LevelView& level) {
  const std::string at =
      "At " + shortest(level.level) + (scene.style.unit.empty() ? "" : " " + scene.style.unit);
  if (!level.bias) {
    const std::string why = level.reason.empty() ? "there are too few pairs" : spaced(level.reason);
    return at + ": no bias can be given yet; " + why + ".";
  }
  std::string out =
      at + ": " + verdict_words(level.verdict) + ". Bias " + shown_signed(*level.bias, scene.style.decimals);
  if (level.low && level.high)
    out += " (90 % interval " + shown_signed(*level.low, scene.style.decimals) + " to " +
           shown_signed(*level.high, scene.style.decimals) + ")";
  if (level.allowable) out += ", allowable " + pm(scene, *level.allowable);
  if (level.reason == "not_covered") return out + ". This level lies outside the range of the samples.";
  return out + (level.reason.empty() ? "." : ". " + reason_words(level.reason));
}

namespace {
std::string fit_words(const std::string& method) {
  if (method == "weighted_deming") return "Line fitted by weighted Deming regression";
  if (method == "york") return "Line fitted with each pair weighted by its own errors (York)";
  return "Fitted line";
}
}  // namespace

std::string pairs_words(const ComparisonScene& scene) {
  const ComparisonView& view = scene.view;
  if (!view.fit)
    return counted(view.window.pairs, "pair", "pairs") + " in the window and no fitted line" +
           (view.fit_reason.empty() ? "." : ": " + spaced(view.fit_reason) + ".");
  const FitView& fit = *view.fit;
  const long thousandths = std::lround(fit.confidence * 1000);
  const std::string level = shown(fit.confidence * 100, thousandths % 10 == 0 ? 0 : 1);
  const std::string line = scene.y + " = " + shown(fit.intercept, scene.style.decimals) + " + " +
                           shown(fit.slope, 4) + " \u00d7 " + scene.x;
  return fit_words(fit.method) + " through " + counted(view.window.pairs, "pair", "pairs") + ": " + line +
         " (" + level + " % intervals: intercept " +
         shown_signed(fit.intercept_interval[0], scene.style.decimals) + " to " +
         shown_signed(fit.intercept_interval[1], scene.style.decimals) + ", slope " +
         shown(fit.slope_interval[0], 4) + " to " + shown(fit.slope_interval[1], 4) + ").";
}

std::string difference_words(const ComparisonScene& scene) {
  const ComparisonView& view = scene.view;
  if (!view.difference) return "Too few pairs for the mean difference and its limits of agreement.";
  const DifferenceView& d = *view.difference;
  const int decimals = scene.style.decimals;
  std::string out = "Mean difference " + scene.y + " \u2212 " + scene.x + " " +
                    shown_signed(d.mean, decimals) + " " + scene.style.unit + ", limits of agreement " +
                    shown_signed(d.lower_limit, decimals) + " to " + shown_signed(d.upper_limit, decimals) +
                    ".";
  if (d.within_count && d.within_of)
    out += " " + std::to_string(*d.within_count) + " of " + std::to_string(*d.within_of) +
           " pairs lie within the allowable difference" +
           (d.within_interval ? " (95 % interval of the share " + shown_share((*d.within_interval)[0]) +
                                    " to " + shown_share((*d.within_interval)[1]) + ")."
                              : ".");
  return out;
}

std::string pair_chart_words(const ComparisonScene& scene) {
  const PairChartView& chart = scene.view.pair_chart;
  const std::string pairs = counted(chart.pairs, "pair", "pairs");
  if (chart.state == PairChartState::learning || !chart.score)
    return "Pair chart learning: " + pairs + " so far, it asks from the 7th on.";
  const std::string score = "change score " + shown(*chart.score, 2) + ", limit " + shown(chart.limit, 2) +
                            ", critical limit " + shown(chart.critical_limit, 2);
  if (chart.state == PairChartState::stable)
    return std::string("Pair chart stable: ") +
           (chart.against_established_line ? "no departure from the established line"
                                           : "no change of the relation") +
           " among " + pairs + " (" + score + ").";
  return "Pair chart unstable: the relation changed " +
         beginning_words(chart.started_at, chart.started_between) + " (" + score + ").";
}

std::string error_words(const ComparisonScene& scene) {
  const ErrorView& error = scene.view.error;
  if (!error.lambda)
    return "The error variance ratio is not known" +
           (error.reason.empty() ? "." : ": " + spaced(error.reason) + ".");
  std::string out = "Error variance ratio lambda = var(error of " + scene.x + ") / var(error of " + scene.y +
                    ") = " + shown(*error.lambda, 2);
  if (error.low && error.high)
    out += " (95 % interval " + shown(*error.low, 2) + " to " + shown(*error.high, 2) + ")";
  const ErrorModelView& model = error.model;
  if (model.growth == "proportional" && model.x && model.y)
    out += "; sd of one result " + shown(100 * model.x->relative, 2) + " % of the level on " + scene.x +
           ", " + shown(100 * model.y->relative, 2) + " % on " + scene.y;
  else if (error.sd_x && error.sd_y)
    out += "; sd of one result " + with_unit(*error.sd_x, scene.style) + " on " + scene.x + ", " +
           with_unit(*error.sd_y, scene.style) + " on " + scene.y;
  if (model.growth == "mixed" && model.level)
    out += " at " + with_unit(*model.level, scene.style) + ", growing with the level";
  return out + (error.source.empty() ? "." : "; from " + spaced(error.source) + ".");
}

std::string scatter_words(const ComparisonScene& scene) {
  if (!scene.view.scatter) return {};
  const ScatterView& s = *scene.view.scatter;
  return std::string(s.excess
                         ? "The pairs scatter more about the line than both analyzers' repeatability explains"
                         : "The scatter about the line fits both analyzers' repeatability") +
         ": sd " + with_unit(s.observed_sd, scene.style) + " seen, " + with_unit(s.expected_sd, scene.style) +
         " expected (p " + small_p(s.p) + ").";
}

std::string warning_words(const std::string& code) {
  static const std::map<std::string, std::string> words = {
      {"resolution_too_coarse", "The results are too coarse: their smallest step is larger than one sd."},
      {"serial_correlation",
       "Successive readings resemble each other, so false signals come more often than planned."},
      {"heavy_tails",
       "Far-off readings are commoner than normal, so false signals come more often than planned."},
      {"baseline_short", "Fewer than 30 readings have been learned; limits are still wide."},
      {"range_not_covered", "The check standards do not span the decision levels."},
      {"error_grows_with_level", "The scatter grows with the level; the error model in use is constant."},
      {"methods_disagree",
       "At a decision level the fitted line and the line by ranks differ by more than either is uncertain."},
      {"lambda_uncertain", "Whether the relation changed depends on the uncertain error variance ratio."},
      {"curved", "The relation between the analyzers is curved; a straight line describes it badly."},
  };
  const auto found = words.find(code);
  return found != words.end() ? found->second : spaced(code);
}

}  // namespace agreed
