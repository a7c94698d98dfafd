// The words of alerts about two analyzers together. A difference is always y - x.
#include <algorithm>
#include <cmath>

#include "core/alert/details.hpp"
#include "core/alert/phrases.hpp"
#include "core/base/rfc3339.hpp"

namespace agreed {
namespace {

/// One comparison's alert with its names at hand; of an id that is not configured the names are general.
struct ComparisonAlert {
  ComparisonAlert(const Alert& a, const Settings& settings)
      : ComparisonAlert(a, settings, configured(settings, a.subject.comparison)) {}

  const Alert& alert;
  std::string id, x, y, x_in_full, y_in_full, measurand;
  NumberStyle numbers;

  [[nodiscard]] std::optional<double> number(const char* name) const {
    return number_in(alert.details, name);
  }
  [[nodiscard]] std::string both() const { return x + " and " + y; }
  [[nodiscard]] std::string both_in_full() const { return x_in_full + " and " + y_in_full; }

 private:
  ComparisonAlert(const Alert& a, const Settings& settings, const ComparisonSettings* known)
      : alert(a),
        id(or_else(a.subject.comparison, "the comparison")),
        x(known ? settings.of(known->x).id : "the analyzer x"),
        y(known ? settings.of(known->y).id : "the analyzer y"),
        x_in_full(known ? analyzer_words(settings, x) : x),
        y_in_full(known ? analyzer_words(settings, y) : y),
        measurand(known ? settings.of(known->measurand).id : id),
        numbers(settings, known ? settings.of(known->measurand).id : "") {}

  static const ComparisonSettings* configured(const Settings& settings, const std::string& comparison) {
    const auto found = std::find_if(settings.comparisons.begin(), settings.comparisons.end(),
                                    [&](const auto& candidate) { return candidate.id == comparison; });
    return found == settings.comparisons.end() ? nullptr : &*found;
  }
};

/// The diagnosis, when there is one (`moved`, `probability`, `evidence`); otherwise what will decide it.
std::string which_moved(const ComparisonAlert& pair) {
  const std::string moved = text_in(pair.alert.details, "moved").value_or("");
  const auto evidence = text_in(pair.alert.details, "evidence");
  if (evidence && moved == "undecided") return "not decided. " + *evidence;
  if (evidence) return *evidence;
  const auto probability = pair.number("probability");
  const std::string how_sure = probability ? " (probability " + percent(*probability) + ")" : "";
  if (moved == "x") return pair.x + " has moved" + how_sure + ".";
  if (moved == "y") return pair.y + " has moved" + how_sure + ".";
  if (moved == "both") return "both analyzers have moved" + how_sure + ".";
  if (moved == "neither")
    return "neither analyzer by its check standards" + how_sure +
           "; look at the samples and how they are split.";
  return "not decided; split samples alone cannot tell which of the two moved. The check standards of " +
         pair.both() + " do: more readings of them will decide it.";
}

/// How far back results are in doubt; empty when that is not known.
std::string look_back_words(const ComparisonAlert& pair) {
  const auto pairs = pair.number("look_back_pairs");
  const auto from = parse_rfc3339(text_in(pair.alert.details, "look_back_from").value_or(""));
  if (!pairs || !from) return "";
  const bool of_agreement = text_in(pair.alert.details, "look_back_from_is") == "agreement_shown";
  const auto samples = list_in(pair.alert.details, "look_back_samples");
  return std::string(of_agreement ? " Agreement was last shown before that at "
                                  : " Agreement was never shown before that; the data begin at ") +
         time_words(from->at) + ": " + counted(*pairs, "pair", "pairs") + " since" +
         (samples.empty() ? "" : ", samples " + list_words(samples)) + ".";
}

/// How the line was fitted, when not by plain Deming regression.
std::string fit_words(const ComparisonAlert& pair) {
  const std::string fit = text_in(pair.alert.details, "fit").value_or("");
  if (fit == "weighted_deming") return " (weighted Deming)";
  return fit == "york" ? " (each pair weighted by its errors)" : "";
}

std::string line_words(const ComparisonAlert& pair) {
  const auto slope = pair.number("slope"), intercept = pair.number("intercept"), pairs = pair.number("pairs");
  std::string text;
  if (slope && intercept)
    text = " The fitted line" + fit_words(pair) + " is " + pair.y + " = " + pair.numbers.mean(*intercept) +
           " + " + fixed(*slope, 4) + " \u00d7 " + pair.x;
  if (pairs) text += (text.empty() ? " It rests on " : ", from ") + counted(*pairs, "pair", "pairs");
  return text.empty() ? text : text + ".";
}

/// "line2 reads 0.350 g/100 g higher than line1 at 13.00 g/100 g".
std::string bias_words(const ComparisonAlert& pair) {
  const auto bias = pair.number("bias"), level = pair.number("level");
  return pair.y + " reads " +
         (bias ? pair.numbers.mean(std::abs(*bias)) + " " + direction(*bias) + " than "
               : std::string("differently from ")) +
         pair.x + (level ? " at " + pair.numbers.result(*level) : "");
}

/// The analyzer that has moved by the diagnosis, if it names one.
std::string named(const ComparisonAlert& pair) {
  const std::string moved = text_in(pair.alert.details, "moved").value_or("");
  return moved == "x" ? pair.x : moved == "y" ? pair.y : "";
}

std::string repeat_checks(const ComparisonAlert& pair) {
  const std::string one = named(pair);
  return "Run the check standards on " + pair.both() + " now, to see " +
         (one.empty() ? "which one moved." : "whether it is " + one + " that moved.");
}

std::string look_at_cause(const ComparisonAlert& pair) {
  const std::string one = named(pair);
  return "Look at what was last done to " + (one.empty() ? pair.both() : one) + " and what is due on " +
         (one.empty() ? "them" : "it") + ": parts changed, cleaning, calibration, sample cell, surroundings.";
}

AlertWords lost_words(const ComparisonAlert& pair) {
  const auto low = pair.number("low"), high = pair.number("high"), allowable = pair.number("allowable");
  const auto confidence = pair.number("confidence"), level = pair.number("level");
  AlertWords words;
  words.title = pair.both() + " no longer agree for " + pair.measurand + ": " + bias_words(pair);
  words.found = "Analyzers " + pair.both_in_full() + ", " + pair.measurand + ": " + bias_words(pair);
  if (low && high)
    words.found += std::string("; the ") + (confidence ? percent(*confidence) + " " : "") +
                   "interval of the difference " + pair.y + " - " + pair.x + " is " +
                   pair.numbers.range(*low, *high);
  words.found += allowable ? "; allowable is " + pair.numbers.mean(*allowable) + " either way."
                           : "; that is more than what is allowable.";
  words.found += line_words(pair);
  words.since = since_words(pair.alert);
  words.cause = which_moved(pair);
  words.doubt = pair.measurand + " results of both analyzers" +
                (level ? " near " + pair.numbers.result(*level) : "") + earliest_start(pair.alert) +
                ", and decisions that took them as one." + look_back_words(pair);
  words.steps = {"Do not use " + pair.both() + " as one for " + pair.measurand +
                     "; hold the results in doubt" + earliest_start(pair.alert) + ".",
                 repeat_checks(pair), look_at_cause(pair),
                 "After a repair or a recalibration record it as an intervention and run split samples until "
                 "agreement is shown again."};
  return words;
}

/// What the pair chart says: of the pairs' own line, or of an established one.
std::string changed_words(const ComparisonAlert& pair) {
  const auto pairs = pair.number("pairs"), intercept = pair.number("relation_intercept");
  const auto slope = pair.number("relation_slope"), after = pair.number("pairs_after");
  if (intercept && slope)
    return ": the " + (after ? "newest " + counted(*after, "pair", "pairs") : std::string("newest pairs")) +
           " do not lie on the established line " + pair.y + " = " + pair.numbers.mean(*intercept) + " + " +
           fixed(*slope, 4) + " \u00d7 " + pair.x;
  return ": two lines, one before and one after some moment, describe the " +
         (pairs ? counted(*pairs, "pair", "pairs") : std::string("pairs")) + " better than one";
}

AlertWords drifting_words(const ComparisonAlert& pair) {
  const auto shift = pair.number("shift"), allowable = pair.number("allowable");
  const bool critical = pair.alert.severity == Severity::critical;
  AlertWords words;
  words.title = "The relation between " + pair.both() + " for " + pair.measurand + " has " +
                (critical ? "clearly " : "") + "changed";
  words.found = "Analyzers " + pair.both_in_full() + ", " + pair.measurand + changed_words(pair) +
                score_words(pair.alert.details) + ".";
  if (shift)
    words.found += " Since then " + pair.y + " reads " + pair.numbers.mean(std::abs(*shift)) + " " +
                   direction(*shift) + " against " + pair.x + " than before.";
  if (allowable) words.found += " The allowable difference is " + pair.numbers.mean(*allowable) + ".";
  words.found += critical
                     ? " The verdict starts anew, from the pairs since the change."
                     : " Whether the difference is still allowable is the verdict's question; this tells "
                       "that something moved.";
  words.since = since_words(pair.alert);
  words.cause = which_moved(pair);
  words.doubt = pair.measurand + " results of " + pair.both() + " taken as one" + earliest_start(pair.alert) +
                (critical ? "." : ", should the change be confirmed.") + look_back_words(pair);
  words.steps = {repeat_checks(pair),
                 critical ? "Hold the " + pair.measurand + " results of both analyzers" +
                                earliest_start(pair.alert) + " until the verdict is known again."
                          : "Keep samples of what is measured meanwhile, so that it can be measured again.",
                 "Run at least 8 split samples on both analyzers, spread over the range of use.",
                 look_at_cause(pair)};
  return words;
}

/// How often chance alone puts a pair so far off.
std::string rarity_words(double p) {
  constexpr double rarest = 1e6;  // beyond it the number says no more
  if (p * rarest < 1) return "less than one pair in a million";
  return "about one pair in " + fixed(std::max(1 / p, 1.0), 0);
}

/// How often chance alone makes a window scatter so much.
std::string windows_words(double p) {
  constexpr double rarest = 1e6;
  if (p * rarest < 1) return "less than one window in a million";
  return "about one window in " + fixed(std::max(1 / p, 1.0), 0);
}

AlertWords outlier_words(const ComparisonAlert& pair) {
  const std::string sample = text_in(pair.alert.details, "sample").value_or("");
  const auto x = pair.number("x_value"), y = pair.number("y_value"), p = pair.number("p");
  const auto residual = pair.number("residual"), count = pair.number("count");
  const bool several = count.value_or(1) > 1;
  const std::string sentence_start = sample.empty() ? "A split sample" : "Split sample " + sample;
  AlertWords words;
  words.title =
      (several ? counted(*count, "split sample", "split samples") + " do" : sentence_start + " does") +
      " not fit the line of " + pair.both() + " for " + pair.measurand;
  words.found = (several ? "The newest: " + (sample.empty() ? "a split sample" : "split sample " + sample)
                         : sentence_start) +
                " is far off the line of analyzers " + pair.both_in_full() + " for " + pair.measurand + ".";
  if (x && y)
    words.found += " " + pair.x + " gave " + pair.numbers.result(*x) + ", " + pair.y + " gave " +
                   pair.numbers.result(*y) + ".";
  if (residual) words.found += " Its residual is " + fixed(*residual, 1) + " standard deviations.";
  if (p && *p > 0) words.found += " So far off by chance: " + rarity_words(*p) + ".";
  words.found += " It is kept and shown, but set aside from the fit.";
  const auto samples = list_in(pair.alert.details, "samples");
  if (several && !samples.empty()) words.found += " So far: " + list_words(samples) + ".";
  words.cause = "the sample (mix-up, poor split, preparation) or one wild result; one pair cannot tell.";
  words.doubt = "the results of " +
                (several          ? std::string("these samples")
                 : sample.empty() ? std::string("that sample")
                                  : "sample " + sample) +
                " on both analyzers.";
  words.steps = {"Measure what is left of the sample again on both analyzers.",
                 "Check that both results belong to the same sample and how it was split."};
  return words;
}

/// "more pairs" and what else would decide it, at the level that it hangs on.
std::string proof_words(const ComparisonAlert& pair) {
  const auto level = pair.number("level"), bias = pair.number("bias"), allowable = pair.number("allowable");
  const auto more = pair.number("pairs_needed"), pairs = pair.number("pairs"),
             sd = pair.number("residual_sd");
  const auto sd_needed = pair.number("sd_needed"), room = pair.number("window_pairs");
  const std::string reason = text_in(pair.alert.details, "reason").value_or("");
  std::string text;
  if (level && bias && allowable)
    text += " It hangs on " + pair.numbers.result(*level) + ", where " + pair.y + " reads " +
            pair.numbers.mean(std::abs(*bias)) + " " + direction(*bias) + " than " + pair.x + " and " +
            pair.numbers.mean(*allowable) + " is allowable.";
  if (reason == "bias_as_large_as_allowable")
    return text + " The bias is about as large as what is allowable, so more pairs will not decide it.";
  if (reason == "not_covered")
    return text +
           " No sample reaches that level: no number of pairs at other levels decides it, samples near it "
           "do.";
  if (!more) return text;
  if (*more < 1) return text + " The pairs that are there are enough to decide it any time.";
  const bool disagreement = text_in(pair.alert.details, "aim") == "disagreement_shown";
  text += " If the bias stays so, about " + counted(*more, "more pair", "more pairs") + " would show " +
          (disagreement ? "that the analyzers disagree" : "that they agree") + " (with 90 % power)";
  if (pairs && room && *pairs + *more > *room)
    text += "; the window holds only " + counted(*room, "pair", "pairs") + ", so it would have to be larger";
  text += ".";
  if (sd && sd_needed && *sd_needed < *sd)
    text += " With the pairs of now it takes a scatter about the line of " + pair.numbers.mean(*sd_needed) +
            " instead of " + pair.numbers.mean(*sd) + ", as from means of " +
            counted(std::ceil(std::pow(*sd / *sd_needed, 2)), "replicate", "replicates") +
            " on both analyzers.";
  return text;
}

AlertWords unproven_words(const ComparisonAlert& pair) {
  const std::string since = text_in(pair.alert.details, "inconclusive_since").value_or("");
  const auto at = parse_rfc3339(since);
  const auto pairs = pair.number("pairs");
  const std::string reason = text_in(pair.alert.details, "reason").value_or("");
  AlertWords words;
  words.title = "Agreement of " + pair.both() + " for " + pair.measurand + " is still unproven";
  words.found = "Analyzers " + pair.both_in_full() + ", " + pair.measurand + ": the " +
                (pairs ? counted(*pairs, "pair", "pairs") + " of the window" : std::string("pairs")) +
                " show neither agreement nor disagreement." + proof_words(pair);
  if (at) words.since = "inconclusive since " + time_words(at->at) + ".";
  words.doubt = pair.measurand + " results of both analyzers used as one: nothing shows that they may be.";
  if (reason == "bias_as_large_as_allowable")
    words.steps = {"Look for what makes " + pair.y + " read differently from " + pair.x +
                       " and remove it, or ask whether the allowable difference is what the use needs.",
                   "Record what was done as an intervention, so that the pairs begin anew."};
  else
    words.steps = {"Run more split samples, at the decision levels above all, or each of them in replicate."};
  return words;
}

AlertWords scattered_words(const ComparisonAlert& pair) {
  const auto observed = pair.number("observed_sd"), expected = pair.number("expected_sd");
  const auto ratio = pair.number("sd_ratio"), p = pair.number("p"), pairs = pair.number("pairs");
  AlertWords words;
  words.title = "Split samples of " + pair.both() + " scatter more for " + pair.measurand +
                " than the analyzers' repeatability explains";
  words.found =
      "Analyzers " + pair.both_in_full() + ", " + pair.measurand + ": the " +
      (pairs ? counted(*pairs, "pair", "pairs") + " of the window scatter" : std::string("pairs scatter")) +
      " about the line";
  if (observed && expected)
    words.found += " with a standard deviation of " + pair.numbers.mean(*observed) +
                   "; repeatability explains " + pair.numbers.mean(*expected);
  else
    words.found += " more than both analyzers' repeatability explains";
  if (ratio) words.found += ", so it is " + fixed(*ratio, 2) + " times as large";
  words.found += ".";
  if (p) words.found += " As much by chance: " + windows_words(*p) + ".";
  words.found +=
      " The samples differ between the analyzers by more than repeatability: what holds for the mean need "
      "not "
      "hold for a single sample.";
  words.since = since_words(pair.alert);
  words.cause =
      "samples that differ between the analyzers (splitting, matrix, ageing between the two runs), or a "
      "repeatability from check standards that is too small for real samples.";
  words.doubt = "the agreement of single samples of " + pair.measurand +
                "; the intervals shown rest on the scatter "
                "that was seen and stay valid.";
  words.steps = {
      "Look at how samples are split and how long lies between the two measurements.",
      "Compare the pairs of one product or one campaign at a time.",
      "Measure a few samples in replicate on both analyzers: if replicates agree, the samples differ."};
  return words;
}

}  // namespace

AlertWords comparison_words(const Alert& alert, const Settings& settings) {
  const ComparisonAlert pair(alert, settings);
  switch (alert.kind) {
    case AlertKind::agreement_lost:
      return lost_words(pair);
    case AlertKind::agreement_drifting:
      return drifting_words(pair);
    case AlertKind::pair_outlier:
      return outlier_words(pair);
    case AlertKind::agreement_unproven:
      return unproven_words(pair);
    default:
      return scattered_words(pair);
  }
}

}  // namespace agreed
