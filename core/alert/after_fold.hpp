#pragma once
// From what a batch led to, to the alert book: the same for the service and for a replay, which differ only
// in what `now` is and what becomes of the transitions.
#include <functional>
#include <string_view>
#include <vector>

#include "core/alert/alert_book.hpp"
#include "core/monitor/monitor.hpp"

namespace agreed {

class AfterFold {
 public:
  using Tell = std::function<void(const std::vector<AlertTransition>&)>;

  /// All outlive this.
  AfterFold(const Settings& settings, const Monitor& monitor, AlertBook& book)
      : settings_(settings), monitor_(monitor), book_(book) {}

  /// Adds the likely cause and what is in doubt to a finding of a lost or a changed agreement.
  void explain(Finding& finding) const;
  /// The charts and comparisons that were folded again.
  [[nodiscard]] std::vector<Subject> refolded(const MonitorOutcome& outcome) const;
  /// Compares the book with what holds after a fold; `subjects`, `reason` and `news` as in
  /// AlertBook::reconcile.
  void reconcile(const MonitorOutcome& outcome, const std::vector<Subject>& subjects, std::string_view reason,
                 Instant now, bool news, const Tell& tell) const;
  /// Brings the open alerts of a comparison up to what its diagnosis says now.
  void tell_anew(ComparisonIndex comparison, Instant now, const Tell& tell) const;

 private:
  const Settings& settings_;
  const Monitor& monitor_;
  AlertBook& book_;
};

}  // namespace agreed
