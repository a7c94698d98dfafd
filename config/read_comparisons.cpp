#include <algorithm>
#include <string_view>

#include "config/parts.hpp"
#include "config/value_text.hpp"

namespace agreed::settings_file {
namespace {

constexpr Duration kEveryIfNotGiven = std::chrono::hours(2);  // for the alarm budget only

ErrorRatioSettings error_ratio_of(const Section& comparison) {
  ErrorRatioSettings ratio;
  const Section section = comparison.section("error_ratio");
  if (!section.exists()) {
    if (comparison.text("error_ratio") == "from_replicates") ratio.source = ErrorSource::replicates;
    return ratio;
  }
  const bool x = section.given("sd_x"), y = section.given("sd_y"), lambda = section.given("lambda");
  if (lambda ? x || y : !(x && y))
    section.error_here("found " +
                       std::string(lambda ? "lambda beside a standard deviation" : "no whole ratio") +
                       ", expected either both sd_x and sd_y or lambda alone");
  ratio.source = lambda ? ErrorSource::given_lambda : ErrorSource::given_sds;
  ratio.sd_x = section.number("sd_x").value_or(0);
  ratio.sd_y = section.number("sd_y").value_or(0);
  ratio.lambda = section.number("lambda").value_or(0);
  return ratio;
}

std::optional<EstablishedLine> relation_of(const Section& comparison) {
  if (comparison.text("relation") == "identity") return EstablishedLine{};
  const Section section = comparison.section("relation");
  if (!section.exists()) return std::nullopt;
  if (!(section.given("intercept") && section.given("slope")))
    section.error_here("found no whole line, expected both intercept and slope, or the word identity");
  return EstablishedLine{section.number("intercept").value_or(0), section.number("slope").value_or(1)};
}

ErrorGrowth growth_of(std::string_view word) {
  if (word == "proportional") return ErrorGrowth::proportional;
  return word == "mixed" ? ErrorGrowth::mixed : ErrorGrowth::constant;
}

void read_fit(const Section& comparison, ComparisonSettings& settings) {
  settings.error_growth = growth_of(comparison.text("error_model").value_or(""));
  if (comparison.text("fit") != "weighted_deming") return;
  settings.fit = FitMethod::weighted_deming;
  if (!comparison.given("error_model")) settings.error_growth = ErrorGrowth::proportional;
}

void check_fit(const Section& comparison, const ComparisonSettings& settings) {
  const ErrorGrowth growth = settings.error_growth;
  const ErrorSource source = settings.error_ratio.source;
  if (settings.fit == FitMethod::weighted_deming && growth != ErrorGrowth::proportional)
    comparison.error("error_model",
                     "found " + shown(comparison.text("error_model").value_or("")) +
                         " beside fit: weighted_deming, expected proportional, which that fit takes for "
                         "granted; or fit: deming");
  if (growth == ErrorGrowth::constant) return;
  const std::string key = comparison.given("error_model") ? "error_model" : "fit";
  if (source == ErrorSource::given_sds)
    comparison.error(key,
                     "found standard deviations beside errors that grow with the level, expected "
                     "error_ratio: {lambda: ...}, from_check_standards or from_replicates: a standard "
                     "deviation holds at one level only");
  else if (growth == ErrorGrowth::mixed && source != ErrorSource::check_standards)
    comparison.error(key,
                     "found mixed, expected error_ratio: from_check_standards beside it: only check "
                     "standards at two levels tell both parts");
}

void read_window(const Section& comparison, ComparisonSettings& settings) {
  const Section window = comparison.section("window");
  settings.window_pairs = window.whole_number("pairs").value_or(settings.window_pairs);
  settings.window_age = window.duration("age");
}

void read_rules(const Section& comparison, ComparisonSettings& settings) {
  settings.confidence = comparison.number("confidence").value_or(settings.confidence);
  settings.confirm = comparison.whole_number("confirm").value_or(settings.confirm);
  settings.alert_confidence = comparison.number("alert_confidence").value_or(settings.alert_confidence);
  settings.least_pairs = comparison.whole_number("least_pairs").value_or(settings.least_pairs);
  settings.pair_within = comparison.duration("pair_within").value_or(settings.pair_within);
  settings.overdue = comparison.usable("every");
  settings.every = comparison.duration("every").value_or(kEveryIfNotGiven);
  settings.set_outliers_aside = comparison.text("outliers") != "keep";
  settings.split_memory = comparison.whole_number("split_memory").value_or(settings.split_memory);
  settings.prove_within = comparison.duration("prove_within");
  settings.relation = relation_of(comparison);
}

/// The key among two that was written, so that the message stands where it can be mended.
std::string given_one(const Section& section, const std::string& first, const std::string& second) {
  return section.given(first) || !section.given(second) ? first : second;
}

void check_rules(const Section& comparison, const ComparisonSettings& settings) {
  if (settings.least_pairs > settings.window_pairs)
    comparison.error("least_pairs", "found " + std::to_string(settings.least_pairs) +
                                        ", expected at most window.pairs, which is " +
                                        std::to_string(settings.window_pairs));
  if (!(settings.alert_confidence > settings.confidence))
    comparison.error(given_one(comparison, "alert_confidence", "confidence"),
                     "found alert_confidence " + shown(settings.alert_confidence) + " and confidence " +
                         shown(settings.confidence) + ", expected alert_confidence above confidence");
  const auto own = comparison.number("in_control_run_length");
  if (own && *own < kShortRunLength)
    comparison.warning("in_control_run_length", "found " + shown(*own) +
                                                    ", expected at least 1000 pairs: false "
                                                    "alerts would have to be answered by hand");
}

/// Without a verdict or without lambda a comparison is of little use, though no error.
void warn_of_gaps(const Section& comparison, const ComparisonSettings& settings, const Settings& all) {
  const Measurand& measurand = all.of(settings.measurand);
  if (measurand.decision_levels.empty() || !measurand.allowable)
    comparison.warning("measurand",
                       "measurand " + measurand.id +
                           " has no decision_levels or no allowable_difference; the verdict will "
                           "stay gathering");
  if (settings.error_ratio.source != ErrorSource::check_standards) return;
  for (const AnalyzerIndex side : {settings.x, settings.y}) {
    const auto watching =
        std::count_if(all.charts.begin(), all.charts.end(), [&](const ChartSettings& chart) {
          return chart.analyzer == side && chart.measurand == settings.measurand;
        });
    if (watching == 1 && settings.error_growth == ErrorGrowth::mixed)
      comparison.warning("error_model", "only one check standard gives " + measurand.id + " on " +
                                            all.of(side).id +
                                            ", so a mixed error model stays unknown and no line is fitted; "
                                            "expected two at different levels, or proportional");
    if (watching > 0) continue;
    comparison.warning("error_ratio",
                       "no check standard gives " + measurand.id + " on " + all.of(side).id +
                           ", so the error ratio stays unknown and no line is fitted; expected one, "
                           "or error_ratio: {lambda: 1.0}");
  }
}

void add_comparison(const Section& section, Draft& draft) {
  ComparisonSettings settings;
  settings.id = section.id();
  settings.title = section.text("title").value_or(section.id());
  const auto measurand = reference<MeasurandIndex>(section, "measurand", draft.settings.measurands);
  const auto x = reference<AnalyzerIndex>(section, "x", draft.settings.analyzers);
  const auto y = reference<AnalyzerIndex>(section, "y", draft.settings.analyzers);
  if (x && y && *x == *y) section.error("y", "found the analyzer of x again, expected another one");
  read_window(section, settings);
  settings.error_ratio = error_ratio_of(section);
  read_fit(section, settings);
  check_fit(section, settings);
  read_rules(section, settings);
  check_rules(section, settings);
  if (measurand && x && y) {
    settings.measurand = *measurand;
    settings.x = *x;
    settings.y = *y;
    warn_of_gaps(section, settings, draft.settings);
  }
  settings.own_run_length = section.number("in_control_run_length");
  draft.settings.comparisons.push_back(std::move(settings));
}

}  // namespace

void read_comparisons(const Section& top, Draft& draft) {
  for (const Section& section : top.named("comparisons")) add_comparison(section, draft);
}

}  // namespace agreed::settings_file
