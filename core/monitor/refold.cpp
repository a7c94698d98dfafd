// The part of the monitor that folds streams again from their history.
#include <algorithm>
#include <iterator>
#include <string_view>
#include <tuple>

#include "core/base/rfc3339.hpp"
#include "core/monitor/monitor.hpp"

namespace agreed {
namespace {

std::string text_of(const Finding& finding, std::string_view detail) {
  for (const auto& [name, value] : finding.details)
    if (name == detail) return std::get<std::string>(value);
  return "";
}

bool contains(const std::vector<std::string>& samples, const std::string& sample) {
  return std::find(samples.begin(), samples.end(), sample) != samples.end();
}

}  // namespace

void Monitor::refold_stale(History& history, MonitorOutcome& outcome) {
  const auto is_stale = [](const auto& stream) { return stream.stale; };
  if (std::none_of(charts_.begin(), charts_.end(), is_stale) &&
      std::none_of(comparisons_.begin(), comparisons_.end(), is_stale))
    return;
  const auto interventions = history.interventions();
  Traces traces(charts_.size());
  for (std::uint32_t i = 0; i < charts_.size(); ++i) {
    if (!charts_[i].stale) continue;
    Trace trace = refold(ChartIndex{i}, history, interventions);
    const auto& readers = charts_[i].read_by;
    if (std::any_of(readers.begin(), readers.end(),
                    [&](ComparisonIndex c) { return comparisons_[c.value].stale; }))
      traces[i] = std::move(trace);
    outcome.charts_changed.insert({i});
    outcome.charts_refolded.insert({i});
  }
  std::vector<Finding> newly_set_aside;
  for (std::uint32_t i = 0; i < comparisons_.size(); ++i) {
    if (!comparisons_[i].stale) continue;
    refold_and_compare({i}, history, interventions, traces, outcome, newly_set_aside);
    outcome.comparisons_changed.insert({i});
    outcome.comparisons_refolded.insert({i});
  }
  // What a stream said before it turned out to be late is replaced by the conditions of its new fold.
  std::erase_if(outcome.findings,
                [&](const Finding& finding) { return of_refolded(finding.subject, outcome); });
  std::move(newly_set_aside.begin(), newly_set_aside.end(), std::back_inserter(outcome.findings));
}

bool Monitor::of_refolded(const Subject& subject, const MonitorOutcome& outcome) const {
  return std::any_of(outcome.charts_refolded.begin(), outcome.charts_refolded.end(),
                     [&](ChartIndex index) { return subject == subject_of(*settings_, index); }) ||
         std::any_of(outcome.comparisons_refolded.begin(), outcome.comparisons_refolded.end(),
                     [&](ComparisonIndex index) { return subject == subject_of(*settings_, index); });
}

Monitor::FoldedChart Monitor::fold_chart(ChartIndex index, History& history,
                                         const std::vector<Intervention>& interventions) const {
  FoldedChart folded{Chart(*settings_, index), {}, {}};
  std::vector<Finding> silent;
  const auto add = [&](const auto& event, Instant at) {
    folded.fold.add(event, silent);
    silent.clear();
    folded.trace.push_back(folded.fold.repeatability());
    folded.trace.back().at = at;
  };
  auto next = interventions.begin();
  const auto add_interventions_until = [&](std::optional<Instant> at) {
    for (; next != interventions.end() && (!at || next->at <= *at); ++next)
      if (next->analyzer == settings_->of(index).analyzer) add(*next, next->at);
  };
  const std::vector<CheckReading> readings = history.checks(index);
  for (auto first = readings.begin(); first != readings.end();) {
    const Instant at = first->measured_at;
    const auto last =
        std::find_if(first, readings.end(), [at](const CheckReading& r) { return r.measured_at != at; });
    add_interventions_until(at);
    add(std::span<const CheckReading>(first, last), at);
    folded.last = at;
    first = last;
  }
  add_interventions_until(std::nullopt);
  return folded;
}

Monitor::Trace Monitor::refold(ChartIndex index, History& history,
                               const std::vector<Intervention>& interventions) {
  FoldedChart folded = fold_chart(index, history, interventions);
  ChartStream& stream = charts_[index.value];
  stream.fold = std::move(folded.fold);
  stream.last = folded.last;
  stream.stale = false;
  return std::move(folded.trace);
}

std::vector<Pair> Monitor::pair_all(ComparisonStream& stream, ComparisonIndex index, History& history) const {
  const ComparisonSettings& settings = settings_->of(index);
  const std::vector<SplitReading> rows = history.splits(index);
  std::vector<Pair> pairs;
  std::vector<std::pair<Instant, std::pair<std::string, SampleRows>>>
      samples;  // by newest row, for the memory
  for (auto first = rows.begin(); first != rows.end();) {
    const auto last =
        std::find_if(first, rows.end(), [&](const SplitReading& r) { return r.sample != first->sample; });
    SampleRows sample;
    Instant newest = first->measured_at;
    for (auto row = first; row != last; ++row) {
      sample.add(row->analyzer == settings.x, {row->measured_at, row->replicate, row->value});
      newest = std::max(newest, row->measured_at);
    }
    for (Pair& pair : pairs_of(first->sample, sample, settings.pair_within)) pairs.push_back(std::move(pair));
    samples.push_back({newest, {first->sample, std::move(sample)}});
    first = last;
  }
  std::sort(pairs.begin(), pairs.end(),
            [](const Pair& a, const Pair& b) { return std::tie(a.at, a.sample) < std::tie(b.at, b.sample); });
  std::sort(samples.begin(), samples.end(), [](const auto& a, const auto& b) {
    return std::tie(a.first, a.second.first) < std::tie(b.first, b.second.first);
  });
  stream.memory.clear();
  for (auto& [newest, sample] : samples) {
    const bool paired = !pairs_of(sample.first, sample.second, settings.pair_within).empty();
    stream.memory.put(sample.first, std::move(sample.second), paired);
  }
  return pairs;
}

void Monitor::refold_and_compare(ComparisonIndex index, History& history,
                                 const std::vector<Intervention>& interventions, Traces& traces,
                                 MonitorOutcome& outcome, std::vector<Finding>& newly_set_aside) {
  const Comparison& fold = comparisons_[index.value].fold;
  const auto before = fold.set_aside();
  const Instant known_since = fold.kept_since();
  auto findings = refold(index, history, interventions, traces);
  auto& all = outcome.set_aside[index];
  for (Finding& finding : findings) {
    all.push_back(text_of(finding, "sample"));
    const auto measured = parse_rfc3339(text_of(finding, "measured_at"));
    // What was set aside among pairs older than those kept was told of then, if it was: no news.
    if (measured && measured->at >= known_since && !contains(before, all.back()))
      newly_set_aside.push_back(std::move(finding));
  }
}

std::vector<Finding> Monitor::refold(ComparisonIndex index, History& history,
                                     const std::vector<Intervention>& interventions, Traces& traces) {
  ComparisonStream& stream = comparisons_[index.value];
  stream.fold = Comparison(*settings_, index);
  stream.last.reset();
  const std::vector<Pair> pairs = pair_all(stream, index, history);
  // The charts still know the repeatability at the oldest pair, or they are folded on the side to find it.
  if (!stream.given && !pairs.empty())
    for (const auto* charts : {&stream.x_charts, &stream.y_charts})
      for (const ChartIndex chart : *charts)
        if (!traces[chart.value] && !charts_[chart.value].fold.repeatability_at(pairs.front().at))
          traces[chart.value] = fold_chart(chart, history, interventions).trace;
  std::vector<Finding> findings, set_aside;
  auto next = interventions.begin();
  const auto add_interventions_until = [&](std::optional<Instant> at) {
    for (; next != interventions.end() && (!at || next->at <= *at); ++next)
      if (concerns(*next, settings_->of(index))) stream.fold.add(*next, findings);
  };
  const auto keep_set_aside = [&] {
    for (Finding& finding : findings)
      if (finding.kind == AlertKind::pair_outlier) set_aside.push_back(std::move(finding));
    findings.clear();
  };
  for (const Pair& pair : pairs) {
    add_interventions_until(pair.at);
    stream.fold.add(pair, *ratio_at(stream, index, pair.at, &traces), findings);
    stream.last = {pair.at, pair.sample};
    keep_set_aside();
  }
  add_interventions_until(std::nullopt);
  keep_set_aside();
  stream.stale = false;
  return set_aside;
}

}  // namespace agreed
