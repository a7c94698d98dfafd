#include "core/alert/after_fold.hpp"

#include <iterator>

#include "core/alert/cause.hpp"

namespace agreed {

void AfterFold::explain(Finding& finding) const {
  if (!has_cause(finding)) return;
  for (std::uint32_t i = 0; i < settings_.comparisons.size(); ++i) {
    if (settings_.comparisons[i].id != finding.subject.comparison) continue;
    if (const auto change = monitor_.explain({i}))
      add_cause(finding, change->diagnosis, change->look_back,
                book_.find_current(finding.kind, finding.subject));
  }
}

std::vector<Subject> AfterFold::refolded(const MonitorOutcome& outcome) const {
  std::vector<Subject> subjects;
  subjects.reserve(outcome.charts_refolded.size() + outcome.comparisons_refolded.size());
  for (const ChartIndex chart : outcome.charts_refolded) subjects.push_back(subject_of(settings_, chart));
  for (const ComparisonIndex comparison : outcome.comparisons_refolded)
    subjects.push_back(subject_of(settings_, comparison));
  return subjects;
}

void AfterFold::reconcile(const MonitorOutcome& outcome, const std::vector<Subject>& subjects,
                          std::string_view reason, Instant now, bool news, const Tell& tell) const {
  std::vector<Finding> conditions;
  const auto add = [&conditions](std::vector<Finding> more) {
    conditions.insert(conditions.end(), std::make_move_iterator(more.begin()),
                      std::make_move_iterator(more.end()));
  };
  for (const ChartIndex chart : outcome.charts_refolded) add(monitor_.conditions(chart));
  for (const ComparisonIndex comparison : outcome.comparisons_refolded) {
    add(monitor_.conditions(comparison));
    tell(book_.admit_outliers(settings_.of(comparison).id, outcome.set_aside.at(comparison), now));
  }
  for (Finding& condition : conditions) explain(condition);
  tell(book_.reconcile(conditions, subjects, reason, now, news));
}

void AfterFold::tell_anew(ComparisonIndex comparison, Instant now, const Tell& tell) const {
  for (Finding& finding : monitor_.conditions(comparison)) {
    if (!has_cause(finding) || book_.find_current(finding.kind, finding.subject) == nullptr) continue;
    explain(finding);
    tell(book_.apply(finding, now));
  }
}

}  // namespace agreed
