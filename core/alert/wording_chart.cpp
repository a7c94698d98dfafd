// The words of alerts about a check standard.
#include <cmath>

#include "core/alert/details.hpp"
#include "core/alert/phrases.hpp"

namespace agreed {
namespace {

/// One chart's alert with its names at hand.
struct ChartAlert {
  ChartAlert(const Alert& a, const Settings& settings)
      : alert(a),
        numbers(settings, a.subject.measurand),
        analyzer(or_else(a.subject.analyzer, "the analyzer")),
        analyzer_in_full(analyzer_words(settings, a.subject.analyzer)),
        standard(or_else(a.subject.standard, "the check standard")),
        measurand(or_else(a.subject.measurand, "its measurand")) {}

  const Alert& alert;
  NumberStyle numbers;
  std::string analyzer, analyzer_in_full, standard, measurand;

  [[nodiscard]] std::optional<double> number(const char* name) const {
    return number_in(alert.details, name);
  }
  /// " (10.530 to 10.710 g/100 g)" or empty.
  [[nodiscard]] std::string limits() const {
    const auto low = number("limit_lower"), high = number("limit_upper");
    return low && high ? numbers.range(*low, *high) : "";
  }
  [[nodiscard]] bool classical() const { return text_in(alert.details, "method") == "classical"; }
  [[nodiscard]] std::string results() const {
    return "results of " + analyzer + " for " + measurand + earliest_start(alert);
  }
};

std::string look_back_at(const ChartAlert& chart) {
  return "Look at what was last done to " + chart.analyzer +
         " and what is due on it: parts changed, cleaning, calibration, sample cell, surroundings.";
}

std::string split_samples(const ChartAlert& chart) {
  return "Run split samples on " + chart.analyzer + " and on the analyzer it is compared with.";
}

std::string newest_reading(const ChartAlert& chart) {
  const auto value = chart.number("value");
  if (!value) return "";
  const std::string limits = chart.limits();
  const auto replicates = chart.number("replicates");
  return (replicates ? " The newest reading (mean of " + fixed(*replicates, 0) + ") is "
                     : " The newest reading is ") +
         chart.numbers.result(*value) +
         (limits.empty()      ? ""
          : chart.classical() ? "; the limits are " + limits
                              : "; from those before it, " + limits + " was to be expected") +
         ".";
}

/// How often limits such as these call without cause: whoever answers must know.
std::string how_often_falsely(const ChartAlert& chart) {
  const auto readings = chart.number("expected_run_length");
  if (!readings || *readings <= 0) return "";
  return " Limits as chosen here call without cause about every " + fixed(*readings, 0) + " readings.";
}

std::string how_many_since(const ChartAlert& chart) {
  const auto readings = chart.number("readings_since");
  return readings ? " Readings since the change: " + fixed(*readings, 0) + "." : "";
}

AlertWords single_reading_words(const ChartAlert& chart) {
  const auto value = chart.number("value"), before = chart.number("mean_before");
  const std::string limits = chart.limits();
  AlertWords words;
  words.title = "One " + chart.measurand + " reading of check standard " + chart.standard + " on " +
                chart.analyzer + " is out of line";
  words.found = "Analyzer " + chart.analyzer_in_full + " read " +
                (value ? chart.numbers.result(*value) : "an unexpected value") + " for " + chart.measurand +
                " on check standard " + chart.standard +
                (limits.empty() ? "" : "; " + limits + " was to be expected") +
                score_words(chart.alert.details) + ".";
  if (before)
    words.found += (chart.classical() ? " The centre line is " : " The mean of the readings before is ") +
                   chart.numbers.mean(*before) + "." + how_often_falsely(chart);
  words.since = since_words(chart.alert);
  words.cause = "the single measurement (preparation, mix-up) or " + chart.analyzer +
                "; one reading cannot tell which.";
  words.doubt = chart.results() + ", until a repeat says otherwise.";
  words.steps = {"Repeat check standard " + chart.standard + " on " + chart.analyzer + " now.",
                 "If the repeat is " + (limits.empty() ? "as before" : "within " + limits) +
                     ", go on; if it is not, hold the results and do not wait for the next check.",
                 look_back_at(chart)};
  return words;
}

AlertWords shift_words(const ChartAlert& chart) {
  const auto shift = chart.number("shift");
  const auto before = chart.number("mean_before"), after = chart.number("mean_after");
  const std::string moved =
      shift ? chart.numbers.mean(std::abs(*shift)) + " " + direction(*shift) : "differently";
  AlertWords words;
  words.title = "Check standard " + chart.standard + " on " + chart.analyzer + " reads " + moved + " for " +
                chart.measurand;
  words.found = "Analyzer " + chart.analyzer_in_full + " reads check standard " + chart.standard + " " +
                moved + " for " + chart.measurand + " than before" + score_words(chart.alert.details) + ".";
  if (before && after)
    words.found += (chart.classical() ? " The centre line is " : " The mean was ") +
                   chart.numbers.mean(*before) +
                   (chart.classical() ? ", the mean since the change " : " and is ") +
                   chart.numbers.mean(*after) + (chart.classical() ? "." : " now.");
  words.found += how_many_since(chart) + newest_reading(chart) + how_often_falsely(chart);
  if (chart.alert.severity == Severity::notice)
    words.found += " The shift is smaller than the smallest one that is held to matter here.";
  words.since = since_words(chart.alert);
  words.cause =
      chart.analyzer + ". If only " + chart.standard +
      " has moved and other check standards on it have not, suspect the check standard itself; this "
      "chart alone cannot tell.";
  words.doubt = chart.results() + ".";
  words.steps = {
      "Repeat check standard " + chart.standard + " on " + chart.analyzer + " and run another one.",
      look_back_at(chart)};
  if (chart.alert.severity != Severity::notice)
    words.steps.push_back("Hold the " + chart.results() + " until the cause is known.");
  words.steps.push_back(split_samples(chart));
  words.steps.emplace_back("Record what is done to the analyzer as an intervention.");
  return words;
}

AlertWords scatter_words(const ChartAlert& chart) {
  const auto sd = chart.number("sd"), ratio = chart.number("ratio_of_sd");
  AlertWords words;
  words.title =
      "Check standard " + chart.standard + " on " + chart.analyzer + " scatters more for " + chart.measurand;
  words.found = "Readings of check standard " + chart.standard + " for " + chart.measurand + " on analyzer " +
                chart.analyzer_in_full + " scatter more than before" + score_words(chart.alert.details) + ".";
  if (sd && ratio)
    words.found += " Their standard deviation was " + chart.numbers.mean(*sd) + " and is " +
                   fixed(*ratio, 1) + " times that now.";
  if (const auto range = chart.number("moving_range"), most = chart.number("moving_range_upper");
      range && most)
    words.found += " The newest moving range is " + chart.numbers.result(*range) + "; up to " +
                   chart.numbers.mean(*most) + " was to be expected.";
  words.found += how_many_since(chart) + newest_reading(chart) + how_often_falsely(chart);
  words.since = since_words(chart.alert);
  words.cause = chart.analyzer + " (its repeatability), or how the check standard is presented to it.";
  words.doubt = "single " + chart.results() + "; means of several are less affected.";
  words.steps = {
      "Measure check standard " + chart.standard + " several times in a row on " + chart.analyzer +
          ": scatter within that run points to the analyzer, scatter only between runs to handling "
          "and surroundings.",
      look_back_at(chart), "Measure in replicate what has to be decided meanwhile.", split_samples(chart)};
  return words;
}

AlertWords unnamed_words(const ChartAlert& chart) {
  AlertWords words;
  words.title =
      "Check standard " + chart.standard + " on " + chart.analyzer + " is not stable for " + chart.measurand;
  words.found = "Readings of check standard " + chart.standard + " for " + chart.measurand + " on analyzer " +
                chart.analyzer_in_full + " are not what they were" + score_words(chart.alert.details) + "." +
                newest_reading(chart);
  words.since = since_words(chart.alert);
  words.doubt = chart.results() + ".";
  words.steps = {"Repeat check standard " + chart.standard + " on " + chart.analyzer + ".",
                 look_back_at(chart), split_samples(chart)};
  return words;
}

// " of 10.620 g/100 g, stated to 0.080 g/100 g", or empty.
std::string reference_in_full(const ChartAlert& chart) {
  const auto reference = chart.number("reference"), uncertainty = chart.number("expanded_uncertainty");
  if (!reference) return "";
  return " of " + chart.numbers.mean(*reference) +
         (uncertainty ? ", stated with an expanded uncertainty of " + chart.numbers.mean(*uncertainty) : "");
}

std::string mean_in_full(const ChartAlert& chart) {
  const auto mean = chart.number("mean"), readings = chart.number("readings");
  if (!mean || !readings) return "";
  const auto e_n = chart.number("normalised_error");
  return " The mean is " + chart.numbers.mean(*mean) + ", of " + fixed(*readings, 0) + " readings" +
         (e_n ? "; normalised error " + fixed(*e_n, 2) : "") + ".";
}

AlertWords biased_words(const ChartAlert& chart) {
  const auto bias = chart.number("bias"), limit = chart.number("limit");
  const std::string off = bias ? chart.numbers.mean(std::abs(*bias)) + (*bias < 0 ? " below" : " above")
                               : std::string("away from");
  AlertWords words;
  words.title = "Check standard " + chart.standard + " on " + chart.analyzer + " reads " + off +
                " its reference value for " + chart.measurand;
  words.found = "The mean of analyzer " + chart.analyzer_in_full + " for " + chart.measurand +
                " on check standard " + chart.standard + " is " + off + " the reference value" +
                reference_in_full(chart);
  words.found += limit ? "; " + chart.numbers.mean(*limit) +
                             " is what the uncertainty of the reference value and of the mean allow."
                       : ", which is more than the uncertainties allow.";
  words.found += mean_in_full(chart);
  words.since = since_words(chart.alert);
  words.cause = chart.analyzer +
                " (its calibration), or the check standard: the wrong lot, a reference value entered "
                "wrongly, a standard that has changed.";
  words.doubt = "results of " + chart.analyzer + " for " + chart.measurand + " near this level.";
  words.steps = {
      "Check the lot and the reference value of " + chart.standard + " against its certificate.",
      "Run another check standard with a reference value on " + chart.analyzer +
          ": if it reads off by as much, it is the analyzer.",
      look_back_at(chart),
      "If the analyzer is adjusted, record that as an intervention: its readings then count anew."};
  return words;
}

}  // namespace

AlertWords chart_words(const Alert& alert, const Settings& settings) {
  const ChartAlert chart(alert, settings);
  if (alert.kind == AlertKind::check_standard_biased) return biased_words(chart);
  const std::string pattern = text_in(alert.details, "pattern").value_or("");
  if (pattern == "single_reading") return single_reading_words(chart);
  if (pattern == "shift") return shift_words(chart);
  if (pattern == "scatter") return scatter_words(chart);
  return unnamed_words(chart);
}

}  // namespace agreed
