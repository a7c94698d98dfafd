// What the outside sees between two batches.
#include "core/base/rfc3339.hpp"
#include "daemon/engine/engine.hpp"

namespace agreed {

std::shared_ptr<const Snapshot> Engine::snapshot() const {
  const std::lock_guard lock(snapshot_mutex_);
  return snapshot_;
}

void Engine::refresh_views(const std::set<ChartIndex>& charts, const std::set<ComparisonIndex>& comparisons) {
  for (const ChartIndex index : charts) {
    const auto fold = std::make_shared<const Chart>(monitor_.chart(index));
    next_.charts[index.value] =
        LazyView<ChartView>([fold, settings = settings_, censored = censored_[index.value]] {
          ChartView view = fold->view();
          view.censored = censored;
          return view;
        });
    next_.chart_states[index.value] = fold->state();
  }
  for (const ComparisonIndex index : comparisons) {
    const auto fold = std::make_shared<const Comparison>(monitor_.comparison(index));
    next_.comparisons[index.value] = LazyView<ComparisonView>(
        [fold, settings = settings_, waiting = monitor_.waiting(index), change = monitor_.explain(index)] {
          ComparisonView view = fold->view();
          view.waiting = waiting;
          if (change) {
            view.diagnosis = change->diagnosis;
            view.look_back = change->look_back;
          }
          return view;
        });
  }
}

std::vector<std::string> Engine::not_ready(const std::vector<InboxState>& inboxes) const {
  std::vector<std::string> reasons;
  if (!trouble_.empty()) reasons.push_back("journal: " + trouble_);
  if (!folded_ && trouble_.empty()) reasons.emplace_back("the journal is being read");
  for (std::size_t i = 0; i < inboxes.size(); ++i)
    if (!inboxes[i].scanned_once && inboxes[i].reason.empty())
      reasons.push_back("the inbox of " + settings_->analyzers[i].id + " has not been looked at yet");
  return reasons;
}

Snapshot Engine::as_before() const {
  Snapshot shown = *before_;
  if (!trouble_.empty()) {
    shown.ready = false;
    shown.not_ready = {"journal: " + trouble_};
  }
  shown.remarks.emplace_back(
      "a changed configuration is being taken in: until the journal is read under it, everything is shown as "
      "before; results wait in their inboxes");
  return shown;
}

void Engine::publish(Instant now) {
  if (before_) {
    auto snapshot = std::make_shared<const Snapshot>(as_before());
    const std::lock_guard lock(snapshot_mutex_);
    snapshot_ = std::move(snapshot);
    return;
  }
  next_.at = now;
  const auto inboxes = queue_.inboxes();
  next_.not_ready = not_ready(inboxes);
  next_.ready = next_.not_ready.empty();
  next_.started = next_.started || next_.ready;
  next_.pending_files = 0;
  next_.remarks.clear();
  for (std::size_t i = 0; i < inboxes.size(); ++i) {
    next_.analyzers[i].inbox = inboxes[i];
    next_.pending_files += inboxes[i].pending;
    if (inboxes[i].unreachable_since)
      next_.remarks.push_back("the inbox of " + settings_->analyzers[i].id + " cannot be reached since " +
                              to_rfc3339(*inboxes[i].unreachable_since) + ": " + inboxes[i].reason);
    next_.analyzers[i].last_reading_at = journal_->last_measured(settings_->analyzers[i].id);
  }
  if (const auto bytes = journal_->overlong_log_bytes())
    next_.remarks.push_back("the journal's write-ahead log has grown to " +
                            std::to_string(*bytes / 1'000'000) +
                            " MB: another program keeps the journal open for reading; end it");
  next_.totals = journal_->totals();
  next_.chain = journal_->head();
  if (book_) {
    next_.alerts = book_->current();
    next_.alerts_open = next_.alerts_acknowledged = next_.alerts_critical = 0;
    next_.alerts_of_comparison.clear();
    for (const SharedAlert& alert : next_.alerts) {
      ++(alert->state == AlertState::open ? next_.alerts_open : next_.alerts_acknowledged);
      if (alert->severity == Severity::critical && alert->state == AlertState::open) ++next_.alerts_critical;
      if (!alert->subject.comparison.empty()) ++next_.alerts_of_comparison[alert->subject.comparison];
    }
  }
  const std::lock_guard lock(snapshot_mutex_);
  if (!configuration_remark_.empty()) next_.remarks.push_back(configuration_remark_);
  snapshot_ = std::make_shared<const Snapshot>(next_);
}

}  // namespace agreed
