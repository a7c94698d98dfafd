#include "core/alert/wording.hpp"

#include <limits>
#include <random>
#include <string>
#include <vector>

#include <doctest/doctest.h>

#include "core/alert/details.hpp"
#include "tests/core/alert/harrow_mill.hpp"

using namespace agreed;
using test::at_hour;

namespace {

Alert worded(Alert alert) {
  write_words(alert, *test::harrow_mill());
  return alert;
}

Alert chart_alert(const std::string& pattern, Details details) {
  Alert alert;
  alert.kind = AlertKind::check_standard_unstable;
  alert.subject = {"line2", "wheat-low", "protein", "", ""};
  alert.started_at = at_hour(0);
  alert.started_between = Period{at_hour(-8), at_hour(16)};
  alert.details = std::move(details);
  alert.details.insert(alert.details.begin(), {"pattern", pattern});
  return alert;
}

Alert pair_alert(AlertKind kind, Severity severity, Details details) {
  Alert alert;
  alert.kind = kind;
  alert.subject.comparison = "protein";
  alert.severity = severity;
  alert.details = std::move(details);
  return alert;
}

Alert line1_alert(AlertKind kind, Details details) {
  Alert alert;
  alert.kind = kind;
  alert.subject.analyzer = "line1";
  alert.details = std::move(details);
  return alert;
}

Alert noticed(Alert alert) {
  alert.severity = Severity::notice;
  return alert;
}

Alert begun(Alert alert) {
  alert.started_at = at_hour(0);
  alert.started_between = Period{at_hour(-8), at_hour(16)};
  return alert;
}

Alert resolved(Alert alert, const std::string& reason) {
  alert.state = AlertState::resolved;
  alert.resolved_at = at_hour(30);
  alert.resolved_reason = reason;
  return alert;
}

/// Title, then the text, line by line.
std::string words(const Alert& alert) {
  const Alert done = worded(alert);
  return done.title + "\n" + done.text + "\n";
}

}  // namespace

TEST_CASE("the words of one reading out of line") {
  CHECK(words(chart_alert("single_reading", {{"value", 11.02},
                                             {"mean_before", 10.6204},
                                             {"limit_lower", 10.53},
                                             {"limit_upper", 10.71},
                                             {"score", 4.613},
                                             {"limit", 4.08}})) ==
        R"(One protein reading of check standard wheat-low on line2 is out of line
Analyzer line2 (NIR analyzer, packing line 2) read 11.02 g/100 g for protein on check standard wheat-low; 10.530 to 10.710 g/100 g was to be expected (change score 4.61, limit 4.08). The mean of the readings before is 10.620 g/100 g.
Since: most likely 2026-02-05 06:00 UTC; a start from 2026-02-04 22:00 UTC to 2026-02-05 22:00 UTC is possible.
Likely cause: the single measurement (preparation, mix-up) or line2; one reading cannot tell which.
In doubt: results of line2 for protein since 2026-02-04 22:00 UTC, until a repeat says otherwise.
Next: 1. Repeat check standard wheat-low on line2 now. 2. If the repeat is within 10.530 to 10.710 g/100 g, go on; if it is not, hold the results and do not wait for the next check. 3. Look at what was last done to line2 and what is due on it: parts changed, cleaning, calibration, sample cell, surroundings. 4. Acknowledge this alert.
)");
}

TEST_CASE("the words of a lasting shift") {
  CHECK(words(chart_alert("shift", {{"value", 10.76},
                                    {"mean_before", 10.6204},
                                    {"mean_after", 10.7434},
                                    {"shift", 0.123},
                                    {"limit_lower", 10.53},
                                    {"limit_upper", 10.71},
                                    {"score", 4.613},
                                    {"limit", 4.08},
                                    {"readings_since", 4.0}})) ==
        R"(Check standard wheat-low on line2 reads 0.123 g/100 g higher for protein
Analyzer line2 (NIR analyzer, packing line 2) reads check standard wheat-low 0.123 g/100 g higher for protein than before (change score 4.61, limit 4.08). The mean was 10.620 g/100 g and is 10.743 g/100 g now. Readings since the change: 4. The newest reading is 10.76 g/100 g; from those before it, 10.530 to 10.710 g/100 g was to be expected.
Since: most likely 2026-02-05 06:00 UTC; a start from 2026-02-04 22:00 UTC to 2026-02-05 22:00 UTC is possible.
Likely cause: line2. If only wheat-low has moved and other check standards on it have not, suspect the check standard itself; this chart alone cannot tell.
In doubt: results of line2 for protein since 2026-02-04 22:00 UTC.
Next: 1. Repeat check standard wheat-low on line2 and run another one. 2. Look at what was last done to line2 and what is due on it: parts changed, cleaning, calibration, sample cell, surroundings. 3. Hold the results of line2 for protein since 2026-02-04 22:00 UTC until the cause is known. 4. Run split samples on line2 and on the analyzer it is compared with. 5. Record what is done to the analyzer as an intervention. 6. Acknowledge this alert.
)");
}

TEST_CASE("the words of a shift too small to matter") {
  CHECK(words(noticed(
            chart_alert("shift", {{"mean_before", 10.6204}, {"mean_after", 10.6104}, {"shift", -0.01}}))) ==
        R"(Check standard wheat-low on line2 reads 0.010 g/100 g lower for protein
Analyzer line2 (NIR analyzer, packing line 2) reads check standard wheat-low 0.010 g/100 g lower for protein than before. The mean was 10.620 g/100 g and is 10.610 g/100 g now. The shift is smaller than the smallest one that is held to matter here.
Since: most likely 2026-02-05 06:00 UTC; a start from 2026-02-04 22:00 UTC to 2026-02-05 22:00 UTC is possible.
Likely cause: line2. If only wheat-low has moved and other check standards on it have not, suspect the check standard itself; this chart alone cannot tell.
In doubt: results of line2 for protein since 2026-02-04 22:00 UTC.
Next: 1. Repeat check standard wheat-low on line2 and run another one. 2. Look at what was last done to line2 and what is due on it: parts changed, cleaning, calibration, sample cell, surroundings. 3. Run split samples on line2 and on the analyzer it is compared with. 4. Record what is done to the analyzer as an intervention. 5. Acknowledge this alert.
)");
}

TEST_CASE("a classical chart says what told it, its limits, and how often these call without cause") {
  const auto has = [](const std::string& text, const char* part) {
    return text.find(part) != std::string::npos;
  };
  const std::string shift =
      words(chart_alert("shift", {{"method", "classical"},
                                  {"signals", std::vector<std::string>{"ewma", "two_of_three_beyond"}},
                                  {"value", 10.70},
                                  {"limit_lower", 10.55},
                                  {"limit_upper", 10.69},
                                  {"mean_before", 10.62},
                                  {"mean_after", 10.68},
                                  {"shift", 0.06},
                                  {"expected_run_length", 48.3}}));
  CHECK(has(shift, "0.060 g/100 g higher for protein than before (told by: EWMA and two of three beyond)."));
  CHECK(has(shift, "The centre line is 10.620 g/100 g, the mean since the change 10.680 g/100 g."));
  CHECK(has(shift, "the limits are 10.550 to 10.690 g/100 g"));
  CHECK(has(shift, "call without cause about every 48 readings."));
  const std::string scatter =
      words(chart_alert("scatter", {{"method", "classical"},
                                    {"signals", std::vector<std::string>{"moving_range_above_limit"}},
                                    {"value", 10.70},
                                    {"moving_range", 0.11},
                                    {"moving_range_upper", 0.0771}}));
  CHECK(has(scatter, "scatter more than before (told by: moving range above limit)."));
  CHECK(has(scatter, "The newest moving range is 0.11 g/100 g; up to 0.077 g/100 g was to be expected."));
}

TEST_CASE("the words of more scatter") {
  CHECK(words(chart_alert(
            "scatter",
            {{"value", 10.76}, {"sd", 0.0447}, {"ratio_of_sd", 2.11}, {"score", 3.9}, {"limit", 3.62}})) ==
        R"(Check standard wheat-low on line2 scatters more for protein
Readings of check standard wheat-low for protein on analyzer line2 (NIR analyzer, packing line 2) scatter more than before (change score 3.90, limit 3.62). Their standard deviation was 0.045 g/100 g and is 2.1 times that now. The newest reading is 10.76 g/100 g.
Since: most likely 2026-02-05 06:00 UTC; a start from 2026-02-04 22:00 UTC to 2026-02-05 22:00 UTC is possible.
Likely cause: line2 (its repeatability), or how the check standard is presented to it.
In doubt: single results of line2 for protein since 2026-02-04 22:00 UTC; means of several are less affected.
Next: 1. Measure check standard wheat-low several times in a row on line2: scatter within that run points to the analyzer, scatter only between runs to handling and surroundings. 2. Look at what was last done to line2 and what is due on it: parts changed, cleaning, calibration, sample cell, surroundings. 3. Measure in replicate what has to be decided meanwhile. 4. Run split samples on line2 and on the analyzer it is compared with. 5. Acknowledge this alert.
)");
}

TEST_CASE("the words of a pattern nobody named") {
  CHECK(words(chart_alert("", {{"score", 4.2}})) ==
        R"(Check standard wheat-low on line2 is not stable for protein
Readings of check standard wheat-low for protein on analyzer line2 (NIR analyzer, packing line 2) are not what they were (change score 4.20).
Since: most likely 2026-02-05 06:00 UTC; a start from 2026-02-04 22:00 UTC to 2026-02-05 22:00 UTC is possible.
In doubt: results of line2 for protein since 2026-02-04 22:00 UTC.
Next: 1. Repeat check standard wheat-low on line2. 2. Look at what was last done to line2 and what is due on it: parts changed, cleaning, calibration, sample cell, surroundings. 3. Run split samples on line2 and on the analyzer it is compared with. 4. Acknowledge this alert.
)");
}

TEST_CASE("the words of agreement lost, nobody knows yet who moved") {
  CHECK(
      words(pair_alert(AlertKind::agreement_lost, Severity::critical,
                       {{"level", 13.0},
                        {"bias", 0.3501},
                        {"low", 0.25},
                        {"high", 0.45},
                        {"allowable", 0.2},
                        {"confidence", 0.999},
                        {"slope", 1.0123},
                        {"intercept", 0.1904},
                        {"pairs", 40.0}})) ==
      R"(line1 and line2 no longer agree for protein: line2 reads 0.350 g/100 g higher than line1 at 13.00 g/100 g
Analyzers line1 (NIR analyzer, packing line 1) and line2 (NIR analyzer, packing line 2), protein: line2 reads 0.350 g/100 g higher than line1 at 13.00 g/100 g; the 99.9 % interval of the difference line2 - line1 is 0.250 to 0.450 g/100 g; allowable is 0.200 g/100 g either way. The fitted line is line2 = 0.190 g/100 g + 1.0123 × line1, from 40 pairs.
Likely cause: not decided; split samples alone cannot tell which of the two moved. The check standards of line1 and line2 do: more readings of them will decide it.
In doubt: protein results of both analyzers near 13.00 g/100 g, and decisions that took them as one.
Next: 1. Do not use line1 and line2 as one for protein; hold the results in doubt. 2. Run the check standards on line1 and line2 now, to see which one moved. 3. Look at what was last done to line1 and line2 and what is due on them: parts changed, cleaning, calibration, sample cell, surroundings. 4. After a repair or a recalibration record it as an intervention and run split samples until agreement is shown again. 5. Acknowledge this alert.
)");
}

TEST_CASE("the words of agreement drifting: warning") {
  CHECK(words(pair_alert(AlertKind::agreement_drifting, Severity::warning,
                         {{"score", 4.4}, {"limit", 4.31}, {"shift", 0.12}, {"pairs", 66.0}})) ==
        R"(The relation between line1 and line2 for protein has changed
Analyzers line1 (NIR analyzer, packing line 1) and line2 (NIR analyzer, packing line 2), protein: two lines, one before and one after some moment, describe the 66 pairs better than one (change score 4.40, limit 4.31). Since then line2 reads 0.120 g/100 g higher against line1 than before. Whether the difference is still allowable is the verdict's question; this tells that something moved.
Likely cause: not decided; split samples alone cannot tell which of the two moved. The check standards of line1 and line2 do: more readings of them will decide it.
In doubt: protein results of line1 and line2 taken as one, should the change be confirmed.
Next: 1. Run the check standards on line1 and line2 now, to see which one moved. 2. Keep samples of what is measured meanwhile, so that it can be measured again. 3. Run at least 8 split samples on both analyzers, spread over the range of use. 4. Look at what was last done to line1 and line2 and what is due on them: parts changed, cleaning, calibration, sample cell, surroundings. 5. Acknowledge this alert.
)");
}

TEST_CASE("the words of agreement drifting: critical, and who moved") {
  CHECK(words(begun(pair_alert(AlertKind::agreement_drifting, Severity::critical,
                               {{"score", 5.4},
                                {"limit", 4.83},
                                {"shift", -0.12},
                                {"pairs", 66.0},
                                {"moved", "y"},
                                {"probability", 0.97}}))) ==
        R"(The relation between line1 and line2 for protein has clearly changed
Analyzers line1 (NIR analyzer, packing line 1) and line2 (NIR analyzer, packing line 2), protein: two lines, one before and one after some moment, describe the 66 pairs better than one (change score 5.40, limit 4.83). Since then line2 reads 0.120 g/100 g lower against line1 than before. The verdict starts anew, from the pairs since the change.
Since: most likely 2026-02-05 06:00 UTC; a start from 2026-02-04 22:00 UTC to 2026-02-05 22:00 UTC is possible.
Likely cause: line2 has moved (probability 97 %).
In doubt: protein results of line1 and line2 taken as one since 2026-02-04 22:00 UTC.
Next: 1. Run the check standards on line1 and line2 now, to see whether it is line2 that moved. 2. Hold the protein results of both analyzers since 2026-02-04 22:00 UTC until the verdict is known again. 3. Run at least 8 split samples on both analyzers, spread over the range of use. 4. Look at what was last done to line2 and what is due on it: parts changed, cleaning, calibration, sample cell, surroundings. 5. Acknowledge this alert.
)");
}

TEST_CASE("the words of a pair set aside") {
  CHECK(words(pair_alert(AlertKind::pair_outlier, Severity::notice,
                         {{"sample", "S-104"},
                          {"x_value", 11.2},
                          {"y_value", 12.9},
                          {"residual", 6.07},
                          {"p", 0.00003425}})) ==
        R"(Split sample S-104 does not fit the line of line1 and line2 for protein
Split sample S-104 is far off the line of analyzers line1 (NIR analyzer, packing line 1) and line2 (NIR analyzer, packing line 2) for protein. line1 gave 11.20 g/100 g, line2 gave 12.90 g/100 g. Its residual is 6.1 standard deviations. So far off by chance: about one pair in 29197. It is kept and shown, but set aside from the fit.
Likely cause: the sample (mix-up, poor split, preparation) or one wild result; one pair cannot tell.
In doubt: the results of sample S-104 on both analyzers.
Next: 1. Measure what is left of the sample again on both analyzers. 2. Check that both results belong to the same sample and how it was split. 3. Acknowledge this alert, with what was found.
)");
}

TEST_CASE("the words of pairs off an established line") {
  const std::string text = words(pair_alert(AlertKind::agreement_drifting, Severity::warning,
                                            {{"score", 4.5},
                                             {"limit", 4.3},
                                             {"shift", 0.05},
                                             {"pairs_after", 12.0},
                                             {"relation_intercept", -0.1},
                                             {"relation_slope", 1.02}}));
  CHECK(
      text.find(
          "protein: the newest 12 pairs do not lie on the established line line2 = -0.100 g/100 g + 1.0200 × "
          "line1 (change score 4.50, limit 4.30). Since then line2 reads 0.050 g/100 g higher") !=
      std::string::npos);
}

TEST_CASE("the words of samples that scatter") {
  CHECK(
      words(pair_alert(AlertKind::sample_scatter, Severity::notice,
                       {{"observed_sd", 0.0512},
                        {"expected_sd", 0.0285},
                        {"sd_ratio", 1.796},
                        {"p", 0.00001},
                        {"pairs", 200.0}})) ==
      R"(Split samples of line1 and line2 scatter more for protein than the analyzers' repeatability explains
Analyzers line1 (NIR analyzer, packing line 1) and line2 (NIR analyzer, packing line 2), protein: the 200 pairs of the window scatter about the line with a standard deviation of 0.051 g/100 g; repeatability explains 0.029 g/100 g, so it is 1.80 times as large. As much by chance: about one window in 100000. The samples differ between the analyzers by more than repeatability: what holds for the mean need not hold for a single sample.
Likely cause: samples that differ between the analyzers (splitting, matrix, ageing between the two runs), or a repeatability from check standards that is too small for real samples.
In doubt: the agreement of single samples of protein; the intervals shown rest on the scatter that was seen and stay valid.
Next: 1. Look at how samples are split and how long lies between the two measurements. 2. Compare the pairs of one product or one campaign at a time. 3. Measure a few samples in replicate on both analyzers: if replicates agree, the samples differ. 4. Acknowledge this alert.
)");
}

TEST_CASE("the words of agreement unproven: pairs that would decide it, or why none would") {
  const Details known = {{"inconclusive_since", "2026-02-05T06:00:00.000Z"},
                         {"pairs", 46.0},
                         {"window_pairs", 200.0},
                         {"residual_sd", 0.03},
                         {"level", 13.0},
                         {"bias", 0.12},
                         {"allowable", 0.2},
                         {"aim", "agreement_shown"}};
  Details decided = known;
  decided.insert(decided.end(), {{"pairs_needed", 24.0}, {"sd_needed", 0.02}});
  CHECK(words(pair_alert(AlertKind::agreement_unproven, Severity::notice, decided)) ==
        R"(Agreement of line1 and line2 for protein is still unproven
Analyzers line1 (NIR analyzer, packing line 1) and line2 (NIR analyzer, packing line 2), protein: the 46 pairs of the window show neither agreement nor disagreement. It hangs on 13.00 g/100 g, where line2 reads 0.120 g/100 g higher than line1 and 0.200 g/100 g is allowable. If the bias stays so, about 24 more pairs would show that they agree (with 90 % power). With the pairs of now it takes a scatter about the line of 0.020 g/100 g instead of 0.030 g/100 g, as from means of 3 replicates on both analyzers.
Since: inconclusive since 2026-02-05 06:00 UTC.
In doubt: protein results of both analyzers used as one: nothing shows that they may be.
Next: 1. Run more split samples, at the decision levels above all, or each of them in replicate. 2. Acknowledge this alert.
)");
  Details large = decided, edge = known, uncovered = known;
  set_detail(large, "pairs_needed", 300.0);
  CHECK(
      words(pair_alert(AlertKind::agreement_unproven, Severity::notice, large))
          .find(
              "about 300 more pairs would show that they agree (with 90 % power); the window holds only 200 "
              "pairs, so it "
              "would have to be larger.") != std::string::npos);
  edge.push_back({"reason", "bias_as_large_as_allowable"});
  CHECK(words(pair_alert(AlertKind::agreement_unproven, Severity::notice, edge))
            .find("about as large as what is allowable, so more pairs will not decide it.") !=
        std::string::npos);
  uncovered.push_back({"reason", "not_covered"});
  CHECK(words(pair_alert(AlertKind::agreement_unproven, Severity::notice, uncovered))
            .find("No sample reaches that level") != std::string::npos);
}

TEST_CASE("the words of two pairs set aside") {
  CHECK(
      words(pair_alert(
          AlertKind::pair_outlier, Severity::notice,
          {{"sample", "S-109"}, {"samples", std::vector<std::string>{"S-104", "S-109"}}, {"count", 2.0}})) ==
      R"(2 split samples do not fit the line of line1 and line2 for protein
The newest: split sample S-109 is far off the line of analyzers line1 (NIR analyzer, packing line 1) and line2 (NIR analyzer, packing line 2) for protein. It is kept and shown, but set aside from the fit. So far: S-104 and S-109.
Likely cause: the sample (mix-up, poor split, preparation) or one wild result; one pair cannot tell.
In doubt: the results of these samples on both analyzers.
Next: 1. Measure what is left of the sample again on both analyzers. 2. Check that both results belong to the same sample and how it was split. 3. Acknowledge this alert, with what was found.
)");
}

TEST_CASE("the words of a rejected file") {
  CHECK(words(line1_alert(AlertKind::file_rejected, {{"file", "day.csv"},
                                                     {"line", 3.0},
                                                     {"column", 7.0},
                                                     {"reason", "a number was expected, found \"1,5\""},
                                                     {"rows", 1.0}})) ==
        R"(File day.csv of line1 could not be read in full
File day.csv of analyzer line1 (NIR analyzer, packing line 1), line 3, column 7: a number was expected, found "1,5". Not taken: 1 row.
In doubt: nothing that was taken; results in the rejected rows are missing from charts and comparisons.
Next: 1. Correct the file, or the export that wrote it, and drop it into the inbox again: rows that were taken already are recognised. 2. If the format of the export has changed, have the configuration adapted. 3. Acknowledge this alert.
)");
}

TEST_CASE("the words of many rejected files") {
  CHECK(words(line1_alert(AlertKind::file_rejected,
                          {{"file", "g.csv"},
                           {"files", std::vector<std::string>{"a.csv", "b.csv", "c.csv", "d.csv", "e.csv",
                                                              "f.csv", "g.csv"}},
                           {"count", 7.0},
                           {"rows", 12.0}})) ==
        R"(7 files of line1 could not be read in full
The newest: file g.csv of analyzer line1 (NIR analyzer, packing line 1). Not taken: 12 rows. So far: c.csv, d.csv, e.csv, f.csv, g.csv (the newest of 7).
In doubt: nothing that was taken; results in the rejected rows are missing from charts and comparisons.
Next: 1. Correct the file, or the export that wrote it, and drop it into the inbox again: rows that were taken already are recognised. 2. If the format of the export has changed, have the configuration adapted. 3. Acknowledge this alert.
)");
}

TEST_CASE("the words of a conflict") {
  CHECK(words(line1_alert(
            AlertKind::readings_conflict,
            {{"item", "wheat-low"}, {"measurand", "protein"}, {"stored", 10.6}, {"value", 10.7}})) ==
        R"(A reading of wheat-low for protein on line1 came again with another value
A reading of wheat-low for protein of analyzer line1 (NIR analyzer, packing line 1) is known already and came again as 10.70 g/100 g instead of 10.60 g/100 g. What was stored first stands; the newcomer is kept as a rejected row.
In doubt: which of the two values is right.
Next: 1. Look up the right value on the analyzer. 2. If the stored one is wrong, void it and send a new row with the right one. 3. Acknowledge this alert.
)");
}

TEST_CASE("the words of an inbox out of reach") {
  CHECK(words(line1_alert(AlertKind::inbox_unreachable,
                          {{"inbox", "drop/line1"}, {"reason", "Permission denied"}})) ==
        R"(The inbox of line1 cannot be reached
The inbox drop/line1 of analyzer line1 (NIR analyzer, packing line 1) cannot be listed: Permission denied. Until it can, no results of it come in and nobody watches over it.
In doubt: nothing that came before; what is measured meanwhile is not looked at.
Next: 1. Check the network share and the rights of the service on the folder. 2. Nothing need be sent again: what waits in the folder is read once it can be reached. 3. Acknowledge this alert.
)");
}

TEST_CASE("the words of over") {
  CHECK(words(resolved(pair_alert(AlertKind::agreement_drifting, Severity::warning, {{"pairs", 66.0}}),
                       "late_data")) ==
        R"(The relation between line1 and line2 for protein has changed
Resolved 2026-02-06 12:00 UTC: results that came late have changed the picture.
It had been found: Analyzers line1 (NIR analyzer, packing line 1) and line2 (NIR analyzer, packing line 2), protein: two lines, one before and one after some moment, describe the 66 pairs better than one. Whether the difference is still allowable is the verdict's question; this tells that something moved.
Likely cause: not decided; split samples alone cannot tell which of the two moved. The check standards of line1 and line2 do: more readings of them will decide it.
In doubt: protein results of line1 and line2 taken as one, should the change be confirmed.
)");
}

TEST_CASE("the last step is to acknowledge, until somebody has") {
  Alert alert = pair_alert(AlertKind::agreement_lost, Severity::critical, {});
  CHECK(worded(alert).text.find("Acknowledge this alert.") != std::string::npos);
  alert.state = AlertState::acknowledged;
  CHECK(worded(alert).text.find("Acknowledge") == std::string::npos);
  CHECK(worded(alert).text.find("Next: 1. ") != std::string::npos);
}

TEST_CASE("why an alert is over is said in words, whatever the reason is called") {
  Alert alert = resolved(pair_alert(AlertKind::pair_outlier, Severity::notice, {}), "acknowledged");
  alert.acknowledged = Acknowledgement{"M. Byrne", at_hour(30), ""};
  const auto first_line = [](const Alert& a) { return a.text.substr(0, a.text.find('\n')); };
  CHECK(first_line(worded(alert)) == "Resolved 2026-02-06 12:00 UTC: acknowledged by M. Byrne.");
  alert.resolved_reason = "configuration_changed";
  CHECK(first_line(worded(alert)) ==
        "Resolved 2026-02-06 12:00 UTC: under the changed configuration it does not hold.");
  alert.resolved_reason = "new_stretch";
  CHECK(first_line(worded(alert)) == "Resolved 2026-02-06 12:00 UTC: new stretch.");
  alert.resolved_reason.clear();
  CHECK(first_line(worded(alert)) == "Resolved 2026-02-06 12:00 UTC: the condition has ceased.");
}

TEST_CASE("moisture is written with its own decimals, and a rounded zero has no sign") {
  Alert alert = chart_alert("shift", {{"shift", -0.001}, {"mean_before", 14.5}, {"mean_after", -0.001}});
  alert.subject.measurand = "moisture";
  const std::string text = words(alert);
  CHECK(text.find("reads check standard wheat-low 0.00 g/100 g lower") != std::string::npos);
  CHECK(text.find("The mean was 14.50 g/100 g and is 0.00 g/100 g now.") != std::string::npos);
}

TEST_CASE("whatever is missing, unknown or not a number: sentences stay whole and nothing is thrown") {
  const std::vector<std::string> names = {"pattern",
                                          "value",
                                          "mean_before",
                                          "mean_after",
                                          "shift",
                                          "sd",
                                          "ratio_of_sd",
                                          "limit_lower",
                                          "limit_upper",
                                          "score",
                                          "limit",
                                          "level",
                                          "bias",
                                          "low",
                                          "high",
                                          "allowable",
                                          "confidence",
                                          "slope",
                                          "intercept",
                                          "pairs",
                                          "sample",
                                          "x",
                                          "y",
                                          "residual",
                                          "p",
                                          "file",
                                          "line",
                                          "column",
                                          "reason",
                                          "rows",
                                          "count",
                                          "samples",
                                          "files",
                                          "items",
                                          "item",
                                          "measurand",
                                          "stored",
                                          "inbox",
                                          "moved",
                                          "probability",
                                          "observed_sd",
                                          "expected_sd",
                                          "readings_since",
                                          "pairs_needed"};
  const std::vector<std::string> ids = {"", "line1", "line2", "wheat-low", "protein", "unknown"};
  const std::vector<std::string> texts = {"",  "shift", "single_reading", "scatter",
                                          "x", "both",  "neither",        "S-1"};
  const double nan = std::numeric_limits<double>::quiet_NaN();
  const std::vector<double> numbers = {0, 1, -1, 12.345, 1e-9, -1e300, 1e300, nan, -nan, 1 / 1e-320};
  std::mt19937 random(99);
  const auto pick = [&](const auto& list) { return list[random() % list.size()]; };
  for (int i = 0; i < 20000; ++i) {
    Alert alert;
    alert.kind = static_cast<AlertKind>(random() % 16);
    alert.severity = static_cast<Severity>(random() % 3);
    alert.state = static_cast<AlertState>(random() % 3);
    alert.subject = {pick(ids), pick(ids), pick(ids), pick(ids), pick(ids)};
    if (random() % 2 == 0) alert.started_at = at_hour(1);
    if (random() % 2 == 0)
      alert.started_between = Period{at_hour(0), at_hour(static_cast<int>(random() % 2))};
    for (const auto& name : names) {
      const auto kind = random() % 6;
      if (kind < 2) alert.details.emplace_back(name, pick(numbers));
      if (kind == 2) alert.details.emplace_back(name, pick(texts));
      if (kind == 3) alert.details.emplace_back(name, std::vector<std::string>(random() % 8, "S-1"));
    }
    const Alert done = worded(alert);
    CAPTURE(done.title);
    CAPTURE(done.text);
    REQUIRE_FALSE(done.title.empty());
    REQUIRE(done.text.back() == '.');
    for (const std::string& text : {done.title, done.text})
      for (const char* flaw :
           {"  ", " .", " ,", ",.", "..", "()", "( ", " )", "nan", "inf", "; ;", ": .", "-0 ", " \n"}) {
        CAPTURE(flaw);
        REQUIRE(text.find(flaw) == std::string::npos);
      }
  }
}

TEST_CASE("the words of a diagnosis and of the look-back") {
  const std::string evidence =
      "Since 2026-02-05 06:00 UTC line2 reads higher. So line2 has moved (probability 97 %).";
  const Alert named =
      worded(begun(pair_alert(AlertKind::agreement_lost, Severity::critical,
                              {{"bias", 0.35},
                               {"moved", "y"},
                               {"probability", 0.97},
                               {"evidence", evidence},
                               {"look_back_from", "2026-02-04T20:00:00.000Z"},
                               {"look_back_from_is", "agreement_shown"},
                               {"look_back_pairs", 7.0},
                               {"look_back_samples", std::vector<std::string>{"S-1", "S-2"}}})));
  CHECK(named.text.find("Likely cause: " + evidence) != std::string::npos);
  CHECK(named.text.find(
            "Agreement was last shown before that at 2026-02-04 20:00 UTC: 7 pairs since, samples S-1 "
            "and S-2.") != std::string::npos);
  const Alert open = worded(begun(pair_alert(AlertKind::agreement_drifting, Severity::warning,
                                             {{"moved", "undecided"},
                                              {"probability", 0.6},
                                              {"evidence", "Too early to tell."},
                                              {"look_back_from", "2026-02-04T20:00:00.000Z"},
                                              {"look_back_from_is", "start_of_data"},
                                              {"look_back_pairs", 1.0}})));
  CHECK(open.text.find("Likely cause: not decided. Too early to tell.") != std::string::npos);
  CHECK(
      open.text.find("Agreement was never shown before that; the data begin at 2026-02-04 20:00 UTC: 1 pair "
                     "since.") != std::string::npos);
}
