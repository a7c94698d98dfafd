#include "core/replay/event_log.hpp"

#include <algorithm>
#include <numeric>
#include <utility>

namespace agreed {
namespace {

bool takes_split(const ComparisonSettings& comparison, const SplitReading& reading) {
  return reading.measurand == comparison.measurand &&
         (reading.analyzer == comparison.x || reading.analyzer == comparison.y);
}

/// Sorted by their times first: events are large, and comparing two of them in full is slow.
std::vector<Event> in_fold_order(std::vector<Event> events) {
  std::vector<std::pair<Instant, std::size_t>> order;
  order.reserve(events.size());
  for (std::size_t i = 0; i < events.size(); ++i) order.emplace_back(time_of(events[i]), i);
  std::sort(order.begin(), order.end(), [&events](const auto& a, const auto& b) {
    if (a.first != b.first) return a.first < b.first;
    return happens_before(events[a.second], events[b.second]);
  });
  std::vector<Event> sorted;
  sorted.reserve(events.size());
  for (const auto& [at, place] : order) sorted.push_back(std::move(events[place]));
  return sorted;
}

}  // namespace

EventLog::EventLog(std::shared_ptr<const Settings> settings, std::vector<Event> events)
    : settings_(std::move(settings)), events_(in_fold_order(std::move(events))) {}

std::vector<CheckReading> EventLog::checks(ChartIndex chart) {
  const ChartSettings& of = settings_->of(chart);
  std::vector<CheckReading> readings;
  for (std::size_t i = 0; i < known_; ++i)
    if (const auto* check = std::get_if<CheckReading>(&events_[i]);
        check != nullptr && check->analyzer == of.analyzer && check->standard == of.standard &&
        check->measurand == of.measurand)
      readings.push_back(*check);
  return readings;
}

std::vector<SplitReading> EventLog::splits(ComparisonIndex comparison) {
  std::vector<SplitReading> rows;
  for (std::size_t i = 0; i < known_; ++i)
    if (const auto* split = std::get_if<SplitReading>(&events_[i]);
        split != nullptr && takes_split(settings_->of(comparison), *split))
      rows.push_back(*split);
  std::stable_sort(rows.begin(), rows.end(),
                   [](const SplitReading& a, const SplitReading& b) { return a.sample < b.sample; });
  return rows;
}

std::vector<SplitReading> EventLog::splits_of(ComparisonIndex comparison, std::string_view sample) {
  if (by_sample_.empty())
    for (std::size_t i = 0; i < events_.size(); ++i)
      if (const auto* split = std::get_if<SplitReading>(&events_[i])) by_sample_[split->sample].push_back(i);
  std::vector<SplitReading> rows;
  const auto found = by_sample_.find(sample);
  if (found == by_sample_.end()) return rows;
  for (const std::size_t place : found->second) {
    if (place >= known_) break;
    const auto& split = std::get<SplitReading>(events_[place]);
    if (takes_split(settings_->of(comparison), split)) rows.push_back(split);
  }
  return rows;
}

std::vector<Intervention> EventLog::interventions() {
  std::vector<Intervention> all;
  for (std::size_t i = 0; i < known_; ++i)
    if (const auto* intervention = std::get_if<Intervention>(&events_[i])) all.push_back(*intervention);
  return all;
}

}  // namespace agreed
