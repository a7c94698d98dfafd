#include "core/monitor/monitor.hpp"

#include <algorithm>
#include <tuple>

#include "core/pair/error_ratio.hpp"

namespace agreed {
namespace {

Instant oldest_of(const SampleRows& rows) {
  Instant oldest{Duration::max()};
  if (!rows.x.empty()) oldest = std::min(oldest, rows.x.front().at);
  if (!rows.y.empty()) oldest = std::min(oldest, rows.y.front().at);
  return oldest;
}

/// Is it a further replicate of the run, or the first reading of one?
bool is_of_run(const std::vector<CheckReading>& run, const Event& event) {
  const auto* check = std::get_if<CheckReading>(&event);
  if (check == nullptr || run.empty()) return check != nullptr;
  const auto key = [](const CheckReading& r) {
    return std::tie(r.measured_at, r.analyzer, r.standard, r.measurand);
  };
  return key(*check) == key(run.front());
}

bool takes(const ComparisonSettings& comparison, const SplitReading& reading) {
  return reading.measurand == comparison.measurand &&
         (reading.analyzer == comparison.x || reading.analyzer == comparison.y);
}

}  // namespace

Subject subject_of(const Settings& settings, ChartIndex chart) {
  const ChartSettings& of = settings.of(chart);
  return {settings.of(of.analyzer).id, settings.of(of.standard).id, settings.of(of.measurand).id, "", ""};
}

Subject subject_of(const Settings& settings, ComparisonIndex comparison) {
  return {"", "", "", settings.of(comparison).id, ""};
}

Monitor::Monitor(std::shared_ptr<const Settings> settings) : settings_(std::move(settings)) {
  charts_.reserve(settings_->charts.size());
  for (std::uint32_t i = 0; i < settings_->charts.size(); ++i)
    charts_.push_back({Chart(*settings_, {i}), {}, {}, false});
  comparisons_.reserve(settings_->comparisons.size());
  for (std::uint32_t i = 0; i < settings_->comparisons.size(); ++i) {
    const ComparisonSettings& comparison = settings_->comparisons[i];
    ComparisonStream stream{
        Comparison(*settings_, {i}), SampleMemory(comparison.pair_within), {}, {}, {}, {}, false};
    if (comparison.error_ratio.source != ErrorSource::check_standards)
      stream.given = given_ratio(comparison.error_ratio, comparison.error_growth);
    for (std::uint32_t c = 0; c < charts_.size(); ++c) {
      const ChartSettings& chart = settings_->charts[c];
      if (chart.measurand != comparison.measurand) continue;
      if (chart.analyzer == comparison.x) stream.x_charts.push_back({c});
      if (chart.analyzer == comparison.y) stream.y_charts.push_back({c});
      if (!stream.given && (chart.analyzer == comparison.x || chart.analyzer == comparison.y))
        charts_[c].read_by.push_back({i});
    }
    comparisons_.push_back(std::move(stream));
  }
}

MonitorOutcome Monitor::apply(std::vector<Event> batch, History& history) {
  std::sort(batch.begin(), batch.end(), happens_before);
  mark_late(batch);
  const std::vector<DuePair> due = pair_up(batch, history);
  mark_unjudged(due);
  MonitorOutcome outcome;
  auto next = due.begin();
  std::vector<CheckReading> run;
  for (auto event = batch.begin(); event != batch.end();) {
    // A pair is judged by the checks up to and including its own moment.
    for (; next != due.end() && next->pair.at < time_of(*event); ++next) fold(*next, outcome);
    if (!std::holds_alternative<CheckReading>(*event)) {
      fold(*event++, outcome);
      continue;
    }
    run.clear();
    while (event != batch.end() && is_of_run(run, *event)) run.push_back(std::get<CheckReading>(*event++));
    fold(run, outcome);
  }
  for (; next != due.end(); ++next) fold(*next, outcome);
  refold_stale(history, outcome);
  return outcome;
}

MonitorOutcome Monitor::fold_all(History& history) {
  for (ChartStream& stream : charts_) stream.stale = true;
  for (ComparisonStream& stream : comparisons_) stream.stale = true;
  MonitorOutcome outcome;
  refold_stale(history, outcome);
  return outcome;
}

void Monitor::take_back(AnalyzerIndex analyzer, StandardIndex standard, MeasurandIndex measurand) {
  const auto index = find_chart(analyzer, standard, measurand);
  if (!index) return;
  ChartStream& stream = charts_[index->value];
  stream.stale = true;
  for (const ComparisonIndex reader : stream.read_by) comparisons_[reader.value].stale = true;
}

void Monitor::take_back_split(AnalyzerIndex analyzer, MeasurandIndex measurand) {
  for (std::size_t i = 0; i < comparisons_.size(); ++i) {
    const ComparisonSettings& comparison = settings_->comparisons[i];
    if (comparison.measurand == measurand && (comparison.x == analyzer || comparison.y == analyzer))
      comparisons_[i].stale = true;
  }
}

void Monitor::mark_late(const std::vector<Event>& batch) {
  for (const Event& event : batch) {
    if (const auto* check = std::get_if<CheckReading>(&event)) mark_late(*check);
    if (const auto* intervention = std::get_if<Intervention>(&event)) mark_late(*intervention);
  }
}

void Monitor::mark_late(const CheckReading& reading) {
  const auto index = find_chart(reading.analyzer, reading.standard, reading.measurand);
  if (!index) return;
  ChartStream& stream = charts_[index->value];
  // A further replicate of a run that is folded changes its point.
  const bool before_a_reading = stream.last && reading.measured_at <= *stream.last;
  const bool before_an_intervention = stream.fold.last_at() && reading.measured_at < *stream.fold.last_at();
  if (before_a_reading || before_an_intervention) stream.stale = true;
  for (const ComparisonIndex reader : stream.read_by) {
    ComparisonStream& comparison = comparisons_[reader.value];
    if (comparison.last && reading.measured_at <= comparison.last->first) comparison.stale = true;
  }
}

void Monitor::mark_late(const Intervention& intervention) {
  for (std::size_t i = 0; i < charts_.size(); ++i) {
    if (settings_->charts[i].analyzer != intervention.analyzer) continue;
    const auto last = charts_[i].fold.last_at();
    if (last && *last >= intervention.at) charts_[i].stale = true;
    for (const ComparisonIndex reader : charts_[i].read_by) {
      ComparisonStream& comparison = comparisons_[reader.value];
      if (comparison.last && comparison.last->first >= intervention.at) comparison.stale = true;
    }
  }
  for (std::size_t i = 0; i < comparisons_.size(); ++i) {
    const auto last = comparisons_[i].fold.last_at();
    if (concerns(intervention, settings_->comparisons[i]) && last && *last >= intervention.at)
      comparisons_[i].stale = true;
  }
}

void Monitor::mark_unjudged(const std::vector<DuePair>& due) {
  for (const DuePair& pair : due) {
    ComparisonStream& stream = comparisons_[pair.comparison.value];
    if (stream.given || stream.stale) continue;
    for (const auto* charts : {&stream.x_charts, &stream.y_charts})
      for (const ChartIndex chart : *charts)
        if (charts_[chart.value].stale || !charts_[chart.value].fold.repeatability_at(pair.pair.at))
          stream.stale = true;
  }
}

std::vector<Monitor::DuePair> Monitor::pair_up(const std::vector<Event>& batch, History& history) {
  std::vector<DuePair> due;
  std::vector<const SplitReading*> rows;
  for (std::uint32_t i = 0; i < comparisons_.size(); ++i) {
    const ComparisonSettings& comparison = settings_->comparisons[i];
    rows.clear();
    for (const Event& event : batch)
      if (const auto* split = std::get_if<SplitReading>(&event);
          split != nullptr && takes(comparison, *split))
        rows.push_back(split);
    if (!rows.empty()) pair_up({i}, rows, history, due);
  }
  std::sort(due.begin(), due.end(), [](const DuePair& a, const DuePair& b) {
    return std::tie(a.pair.at, a.comparison, a.pair.sample) <
           std::tie(b.pair.at, b.comparison, b.pair.sample);
  });
  return due;
}

void Monitor::pair_up(ComparisonIndex index, std::span<const SplitReading*> rows, History& history,
                      std::vector<DuePair>& due) {
  if (comparisons_[index.value].stale) return;
  std::stable_sort(rows.begin(), rows.end(),
                   [](const SplitReading* a, const SplitReading* b) { return a->sample < b->sample; });
  for (auto first = rows.begin(); first != rows.end();) {
    const auto last = std::find_if(first, rows.end(),
                                   [&](const SplitReading* row) { return row->sample != (*first)->sample; });
    pair_up_sample(index, {first, last}, history, due);
    first = last;
  }
}

void Monitor::pair_up_sample(ComparisonIndex index, std::span<const SplitReading* const> rows,
                             History& history, std::vector<DuePair>& due) {
  ComparisonStream& stream = comparisons_[index.value];
  const ComparisonSettings& settings = settings_->of(index);
  const std::string& sample = rows.front()->sample;
  SampleRows known;
  // A sample id that came again may be remembered without its rows of long ago.
  const SampleRows* remembered = stream.memory.find(sample);
  const bool complete = remembered != nullptr && oldest_of(*remembered) <= rows.front()->measured_at;
  if (!complete && stream.memory.may_have_forgotten(rows.front()->measured_at))
    known = forgotten_rows(index, rows, history);
  else if (remembered != nullptr)
    known = *remembered;
  const auto folded = pairs_of(sample, known, settings.pair_within);
  for (const SplitReading* row : rows)
    known.add(row->analyzer == settings.x, {row->measured_at, row->replicate, row->value});
  const auto now = pairs_of(sample, known, settings.pair_within);
  stream.memory.put(sample, std::move(known), !now.empty());

  std::size_t kept = 0;
  for (const Pair& pair : now) {
    const bool is_folded = std::any_of(folded.begin(), folded.end(), [&](const Pair& old) {
      return old.at == pair.at && old.x_replicates == pair.x_replicates &&
             old.y_replicates == pair.y_replicates;
    });
    if (is_folded) {
      ++kept;
      continue;
    }
    const auto last_event = stream.fold.last_at();
    if ((stream.last && std::tie(pair.at, pair.sample) < std::tie(stream.last->first, stream.last->second)) ||
        (last_event && pair.at < *last_event))
      stream.stale = true;
    due.push_back({pair, index});
  }
  if (kept != folded.size()) stream.stale = true;  // a replicate changed a pair that was folded already
}

SampleRows Monitor::forgotten_rows(ComparisonIndex index, std::span<const SplitReading* const> in_batch,
                                   History& history) const {
  SampleRows known;
  for (const SplitReading& row : history.splits_of(index, in_batch.front()->sample)) {
    const bool of_this_batch = std::any_of(in_batch.begin(), in_batch.end(), [&](const SplitReading* b) {
      return std::tie(b->analyzer, b->measured_at, b->replicate) ==
             std::tie(row.analyzer, row.measured_at, row.replicate);
    });
    if (!of_this_batch)
      known.add(row.analyzer == settings_->of(index).x, {row.measured_at, row.replicate, row.value});
  }
  return known;
}

void Monitor::fold(std::span<const CheckReading> run, MonitorOutcome& outcome) {
  const CheckReading& first = run.front();
  const auto index = find_chart(first.analyzer, first.standard, first.measurand);
  if (!index) return;
  ChartStream& stream = charts_[index->value];
  if (stream.stale) return;
  stream.fold.add(run, outcome.findings);
  stream.last = first.measured_at;
  outcome.charts_changed.insert(*index);
}

void Monitor::fold(const Event& event, MonitorOutcome& outcome) {
  if (const auto* split = std::get_if<SplitReading>(&event)) {
    // Its pair is folded at its own moment; here only a half may have begun to wait.
    for (std::uint32_t i = 0; i < comparisons_.size(); ++i)
      if (takes(settings_->comparisons[i], *split)) outcome.comparisons_changed.insert({i});
    return;
  }
  const auto* intervention = std::get_if<Intervention>(&event);
  for (std::uint32_t i = 0; i < charts_.size(); ++i) {
    if (charts_[i].stale || settings_->charts[i].analyzer != intervention->analyzer) continue;
    charts_[i].fold.add(*intervention, outcome.findings);
    outcome.charts_changed.insert({i});
  }
  for (std::uint32_t i = 0; i < comparisons_.size(); ++i) {
    if (comparisons_[i].stale || !concerns(*intervention, settings_->comparisons[i])) continue;
    comparisons_[i].fold.add(*intervention, outcome.findings);
    outcome.comparisons_changed.insert({i});
  }
}

void Monitor::fold(const DuePair& due, MonitorOutcome& outcome) {
  ComparisonStream& stream = comparisons_[due.comparison.value];
  outcome.comparisons_paired.insert(due.comparison);
  if (stream.stale) return;
  // There is one: see mark_unjudged.
  const ErrorRatio ratio = ratio_at(stream, due.comparison, due.pair.at, nullptr).value();
  stream.fold.add(due.pair, ratio, outcome.findings);
  stream.last = {due.pair.at, due.pair.sample};
  outcome.comparisons_changed.insert(due.comparison);
}

std::optional<std::vector<Repeatability>> Monitor::standards_at(std::span<const ChartIndex> charts,
                                                                Instant at, const Traces* traces) const {
  std::vector<Repeatability> standards;
  for (const ChartIndex index : charts) {
    if (traces && (*traces)[index.value]) {
      const Trace& trace = *(*traces)[index.value];
      const auto after = std::upper_bound(trace.begin(), trace.end(), at,
                                          [](Instant t, const Repeatability& r) { return t < r.at; });
      if (after != trace.begin()) standards.push_back(*std::prev(after));
      continue;
    }
    const auto found = charts_[index.value].fold.repeatability_at(at);
    if (!found) return std::nullopt;
    standards.push_back(*found);
  }
  return standards;
}

std::optional<ErrorRatio> Monitor::ratio_at(const ComparisonStream& stream, ComparisonIndex index, Instant at,
                                            const Traces* traces) const {
  if (stream.given) return stream.given;
  const auto x = standards_at(stream.x_charts, at, traces), y = standards_at(stream.y_charts, at, traces);
  if (!x || !y) return std::nullopt;
  const ComparisonSettings& settings = settings_->of(index);
  const std::string& measurand = settings_->of(settings.measurand).id;
  const std::string &on_x = settings_->of(settings.x).id, &on_y = settings_->of(settings.y).id;
  return ratio_from_standards(*x, *y, settings.error_growth, measurand, on_x, on_y);
}

bool Monitor::concerns(const Intervention& intervention, const ComparisonSettings& comparison) const {
  return intervention.restarts() &&
         (intervention.analyzer == comparison.x || intervention.analyzer == comparison.y) &&
         (!intervention.measurand || *intervention.measurand == comparison.measurand);
}

bool Monitor::lacks_partner(ComparisonIndex index, const SplitReading& result) const {
  const ComparisonSettings& of = settings_->of(index);
  const SampleRows* rows = comparisons_.at(index.value).memory.find(result.sample);
  return rows != nullptr &&
         agreed::lacks_partner(*rows, result.analyzer == of.x, result.measured_at, of.pair_within);
}

std::optional<ChartIndex> Monitor::find_chart(AnalyzerIndex analyzer, StandardIndex standard,
                                              MeasurandIndex measurand) const {
  const auto key = std::tie(analyzer, standard, measurand);
  const auto found = std::lower_bound(settings_->charts.begin(), settings_->charts.end(), key,
                                      [](const ChartSettings& chart, auto k) {
                                        return std::tie(chart.analyzer, chart.standard, chart.measurand) < k;
                                      });
  if (found == settings_->charts.end() || std::tie(found->analyzer, found->standard, found->measurand) != key)
    return std::nullopt;
  return ChartIndex{static_cast<std::uint32_t>(found - settings_->charts.begin())};
}

std::vector<Finding> Monitor::conditions(ChartIndex chart) const {
  std::vector<Finding> findings;
  charts_.at(chart.value).fold.conditions(findings);
  return findings;
}

std::vector<Finding> Monitor::conditions(ComparisonIndex comparison) const {
  std::vector<Finding> findings;
  comparisons_.at(comparison.value).fold.conditions(findings);
  return findings;
}

}  // namespace agreed
