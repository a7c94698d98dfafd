#include "core/alert/overdue.hpp"

#include <algorithm>
#include <cmath>
#include <string>

#include "core/base/rfc3339.hpp"

namespace agreed {
namespace {
constexpr const char* kCame = "it_came";

/// Judges one subject after the other.
class Watch {
 public:
  Watch(const OverduePolicy& policy, Instant now) : policy_(policy), now_(now) {}

  /// Since when something with this cadence is overdue.
  [[nodiscard]] std::optional<Instant> overdue_since(const LastCame& last, Duration every) const {
    const Duration wait(std::llround(static_cast<double>(every.count()) * policy_.patience));
    const auto due = end_of_wait(policy_.quiet, last.at, wait);
    return due && *due < now_ ? due : std::nullopt;
  }

 private:
  const OverduePolicy& policy_;
  Instant now_;
};

std::optional<Duration> shorter(const std::optional<Duration>& a, Duration b) {
  return a ? std::min(*a, b) : b;
}

std::optional<Duration> shortest_cadence(const Settings& settings, AnalyzerIndex analyzer) {
  std::optional<Duration> shortest;
  for (const ChartSettings& chart : settings.charts)
    if (chart.overdue && chart.analyzer == analyzer) shortest = shorter(shortest, chart.every);
  for (const ComparisonSettings& comparison : settings.comparisons)
    if (comparison.overdue && (comparison.x == analyzer || comparison.y == analyzer))
      shortest = shorter(shortest, comparison.every);
  return shortest;
}

Finding missing(AlertKind kind, Subject subject, Instant due, const LastCame& last, Duration every) {
  Finding finding{.kind = kind, .subject = std::move(subject), .severity = Severity::notice, .at = due};
  finding.started_at = due;
  finding.details = {{last.came ? "last_received_at" : "service_started_at", to_rfc3339(last.at)},
                     {"every_seconds", static_cast<double>(every.count()) / 1000}};
  return finding;
}

Finding came(AlertKind kind, Subject subject, Instant at) {
  return {.kind = kind, .subject = std::move(subject), .holds = false, .at = at, .resolved_reason = kCame};
}

/// The position of the one with this id.
template <class Index, class Item>
std::optional<Index> place_of(const std::vector<Item>& items, const std::string& id) {
  const auto found =
      std::find_if(items.begin(), items.end(), [&](const Item& item) { return item.id == id; });
  if (found == items.end()) return std::nullopt;
  return Index{static_cast<std::uint32_t>(found - items.begin())};
}

struct Cadence {
  StandardIndex standard;
  Duration every;
};

/// The check standards of an analyzer that have a cadence, each once.
std::vector<Cadence> cadences_of(const Settings& settings, AnalyzerIndex analyzer) {
  std::vector<Cadence> cadences;
  for (const ChartSettings& chart : settings.charts) {
    const bool known = std::any_of(cadences.begin(), cadences.end(),
                                   [&](const Cadence& c) { return c.standard == chart.standard; });
    if (chart.analyzer == analyzer && chart.overdue && !known)
      cadences.push_back({chart.standard, chart.every});
  }
  return cadences;
}

/// The check standards that are overdue on one analyzer, told as one; ceased once none is.
std::optional<Finding> checks_of(const Settings& settings, const Watch& watch, const Arrivals& arrivals,
                                 AnalyzerIndex analyzer, Instant now) {
  const Subject subject{.analyzer = settings.of(analyzer).id};
  std::optional<Finding> finding;
  std::vector<std::string> standards;
  bool all_came = true;
  for (const auto& [standard, every] : cadences_of(settings, analyzer)) {
    const LastCame last = arrivals.standard(analyzer, standard);
    all_came = all_came && last.came;
    const auto due = watch.overdue_since(last, every);
    if (!due) continue;
    standards.push_back(settings.of(standard).id);
    if (!finding || *due < *finding->started_at)
      finding = missing(AlertKind::check_overdue, subject, *due, last, every);
  }
  if (finding) finding->details.emplace_back("standards", standards);
  if (!finding && all_came) finding = came(AlertKind::check_overdue, subject, now);
  return finding;
}
}  // namespace

Arrivals::Arrivals(const Settings& settings, Instant start)
    : start_(start),
      analyzers_(settings.analyzers.size(), {start, false}),
      comparisons_(settings.comparisons.size(), {start, false}) {}

Arrivals::Arrivals(const Settings& settings, Instant start, const Arrivals& before, const Settings& then)
    : Arrivals(settings, start) {
  std::map<AnalyzerIndex, AnalyzerIndex> analyzers;  // then -> now
  for (std::uint32_t i = 0; i < then.analyzers.size(); ++i)
    if (const auto now = place_of<AnalyzerIndex>(settings.analyzers, then.analyzers[i].id)) {
      analyzers_[now->value] = before.analyzers_.at(i);
      analyzers[{i}] = *now;
    }
  for (std::uint32_t i = 0; i < then.comparisons.size(); ++i)
    if (const auto now = place_of<ComparisonIndex>(settings.comparisons, then.comparisons[i].id))
      comparisons_[now->value] = before.comparisons_.at(i);
  for (const auto& [of, came] : before.standards_) {
    const auto analyzer = analyzers.find(of.first);
    const auto standard = place_of<StandardIndex>(settings.standards, then.of(of.second).id);
    if (analyzer != analyzers.end() && standard) standards_[{analyzer->second, *standard}] = came;
  }
}

void Arrivals::add(const Event& event, Instant now) {
  if (const auto* check = std::get_if<CheckReading>(&event)) {
    analyzers_.at(check->analyzer.value) = {now, true};
    standards_[{check->analyzer, check->standard}] = {now, true};
  } else if (const auto* split = std::get_if<SplitReading>(&event)) {
    analyzers_.at(split->analyzer.value) = {now, true};
  }
}

void Arrivals::add_pair(ComparisonIndex comparison, Instant now) {
  comparisons_.at(comparison.value) = {now, true};
}

LastCame Arrivals::standard(AnalyzerIndex analyzer, StandardIndex standard) const {
  const auto found = standards_.find({analyzer, standard});
  return found == standards_.end() ? LastCame{start_, false} : found->second;
}

bool has_cadence(const Settings& settings, AlertKind kind, const Subject& subject) {
  if (kind == AlertKind::pairs_overdue) {
    const auto index = place_of<ComparisonIndex>(settings.comparisons, subject.comparison);
    return index && settings.of(*index).overdue;
  }
  const auto analyzer = place_of<AnalyzerIndex>(settings.analyzers, subject.analyzer);
  if (!analyzer) return false;
  if (kind == AlertKind::check_overdue) return !cadences_of(settings, *analyzer).empty();
  return kind == AlertKind::results_silent && shortest_cadence(settings, *analyzer).has_value();
}

std::vector<Finding> overdue_findings(const Settings& settings, const OverduePolicy& policy,
                                      const Arrivals& arrivals, Instant now) {
  const Watch watch(policy, now);
  std::vector<Finding> findings;
  std::vector<bool> silent(settings.analyzers.size());
  for (std::uint32_t i = 0; i < settings.analyzers.size(); ++i) {
    const auto every = shortest_cadence(settings, {i});
    if (!every) continue;
    const LastCame last = arrivals.analyzer({i});
    const Subject subject{.analyzer = settings.analyzers[i].id};
    if (const auto due = watch.overdue_since(last, *every)) {
      silent[i] = true;
      findings.push_back(missing(AlertKind::results_silent, subject, *due, last, *every));
      continue;
    }
    if (last.came) findings.push_back(came(AlertKind::results_silent, subject, now));
    if (auto checks = checks_of(settings, watch, arrivals, {i}, now)) findings.push_back(std::move(*checks));
  }
  for (std::uint32_t i = 0; i < settings.comparisons.size(); ++i) {
    const ComparisonSettings& comparison = settings.comparisons[i];
    if (!comparison.overdue || silent[comparison.x.value] || silent[comparison.y.value]) continue;
    const LastCame last = arrivals.comparison({i});
    const Subject subject{.comparison = comparison.id};
    if (const auto due = watch.overdue_since(last, comparison.every))
      findings.push_back(missing(AlertKind::pairs_overdue, subject, *due, last, comparison.every));
    else if (last.came)
      findings.push_back(came(AlertKind::pairs_overdue, subject, now));
  }
  return findings;
}

}  // namespace agreed
