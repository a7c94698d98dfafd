#include "core/alert/lonely_halves.hpp"

#include <algorithm>
#include <map>
#include <optional>
#include <string>
#include <utility>

namespace agreed {

void LonelyHalves::add(const SplitReading& result, Instant received) {
  std::optional<Duration> longest;
  for (const ComparisonSettings& comparison : settings_.comparisons)
    if (is_part_of(result, comparison))
      longest = std::max(longest.value_or(comparison.pair_within), comparison.pair_within);
  if (!longest || !known_.insert(key_of(result)).second) return;
  waiting_.push_back({result, received + *longest});
  ++unsettled_;
}

void LonelyHalves::settle(const LacksPartner& lacks_partner) {
  const auto first_new = waiting_.end() - static_cast<std::ptrdiff_t>(std::exchange(unsettled_, 0));
  const auto found_one = [&](const Waiting& half) {
    if (is_lonely(half.result, lacks_partner)) return false;
    known_.erase(key_of(half.result));
    return true;
  };
  waiting_.erase(std::remove_if(first_new, waiting_.end(), found_one), waiting_.end());
  for (; waiting_.size() > kCapacity; waiting_.pop_front()) known_.erase(key_of(waiting_.front().result));
}

bool LonelyHalves::any_due(Instant now) const {
  return std::any_of(waiting_.begin(), waiting_.end(),
                     [now](const Waiting& half) { return half.last < now; });
}

void LonelyHalves::clear() {
  waiting_.clear();
  known_.clear();
  unsettled_ = 0;
}

LonelyHalves::Key LonelyHalves::key_of(const SplitReading& result) {
  return {result.analyzer, result.measurand, result.sample};
}

std::vector<Finding> LonelyHalves::due(Instant now, const LacksPartner& lacks_partner) {
  std::map<AnalyzerIndex, std::vector<std::string>> samples;
  const auto take = [&](const Waiting& half) {
    if (half.last >= now) return false;
    known_.erase(key_of(half.result));
    auto& of_analyzer = samples[half.result.analyzer];
    const bool known =
        std::find(of_analyzer.begin(), of_analyzer.end(), half.result.sample) != of_analyzer.end();
    if (!known && is_lonely(half.result, lacks_partner)) of_analyzer.push_back(half.result.sample);
    return true;
  };
  waiting_.erase(std::remove_if(waiting_.begin(), waiting_.end(), take), waiting_.end());
  std::vector<Finding> findings;
  for (auto& [analyzer, items] : samples)
    if (!items.empty())
      findings.push_back({.kind = AlertKind::unpaired_samples,
                          .subject = {.analyzer = settings_.of(analyzer).id},
                          .severity = Severity::notice,
                          .at = now,
                          .details = {{"items", std::move(items)}}});
  return findings;
}

bool LonelyHalves::is_lonely(const SplitReading& result, const LacksPartner& lacks_partner) const {
  bool lonely = false;
  for (std::uint32_t i = 0; i < settings_.comparisons.size(); ++i) {
    if (!is_part_of(result, settings_.comparisons[i])) continue;
    if (!lacks_partner({i}, result)) return false;
    lonely = true;
  }
  return lonely;
}

bool LonelyHalves::is_part_of(const SplitReading& result, const ComparisonSettings& comparison) const {
  return comparison.measurand == result.measurand &&
         (comparison.x == result.analyzer || comparison.y == result.analyzer);
}

}  // namespace agreed
