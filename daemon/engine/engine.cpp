#include "daemon/engine/engine.hpp"

#include <algorithm>

#include <malloc.h>

#include "daemon/clock.hpp"
#include "daemon/engine/journal_history.hpp"
#include "daemon/give_way.hpp"
#include "daemon/log.hpp"
#include "daemon/render/alert_json.hpp"
#include "daemon/sha256.hpp"
#include "daemon/thread_name.hpp"

namespace agreed {
namespace {

// How long the engine sleeps when nothing comes: only a longstop, everything that happens wakes it.
constexpr Duration kIdle = std::chrono::minutes(1);
// While the journal cannot be used: how long until it is tried again.
constexpr Duration kTryAgain = std::chrono::seconds(2);

std::pair<AnalyzerIndex, std::string> file_of(const QueuedPiece& queued) {
  return {queued.piece.file.analyzer, queued.piece.file.name};
}

}  // namespace

Engine::Engine(const Config& config, std::unique_ptr<Journal> journal)
    : Engine(config, std::move(journal), Arrivals(*config.settings, now_utc())) {}

Engine::Engine(const Config& config, Legacy legacy)
    : Engine(config, std::move(legacy.journal),
             Arrivals(*config.settings, now_utc(), legacy.arrivals, *legacy.settings)) {
  if (!legacy.snapshot->started) return;
  before_ = std::move(legacy.snapshot);
  next_.started = true;
  next_.started_at = before_->started_at;
  for (std::uint32_t i = 0; i < inboxes_.size(); ++i)
    if (const auto known = legacy.inboxes.find(inboxes_[i]); known != legacy.inboxes.end())
      queue_.expect({i}, known->second);
  publish(now_utc());
}

Engine::Engine(const Config& config, std::unique_ptr<Journal> journal, Arrivals arrivals)
    : settings_(config.settings),
      routes_(config.routes),
      alert_policy_(config.alert_policy),
      state_folder_(config.state),
      least_free_mb_(config.least_free_mb),
      interventions_(settings_, config.intake),
      config_sha256_(sha256_hex(config.text)),
      config_text_(config.text),
      queue_(settings_->analyzers.size()),
      journal_(std::move(journal)),
      monitor_(settings_),
      ledger_(settings_),
      censored_(settings_->charts.size()),
      arrivals_(std::move(arrivals)),
      lonely_(*settings_) {
  for (const IntakeSettings& intake : config.intake) inboxes_.push_back(intake.inbox);
  next_.started_at = now_utc();
  next_.config_sha256 = config_sha256_;
  next_.settings = settings_;
  for (const Route& route : routes_) next_.routes.push_back(route.name);
  next_.overdue = alert_policy_.overdue;
  for (std::uint32_t i = 0; i < settings_->charts.size(); ++i) {
    next_.charts.emplace_back(std::make_shared<const ChartView>(monitor_.chart({i}).view()));
    next_.chart_states.push_back(ChartState::learning);
  }
  for (std::uint32_t i = 0; i < settings_->comparisons.size(); ++i)
    next_.comparisons.emplace_back(std::make_shared<const ComparisonView>(monitor_.comparison({i}).view()));
  next_.analyzers.resize(settings_->analyzers.size());
  publish(next_.started_at);
}

Engine::~Engine() {
  stop();
}

void Engine::start(std::string base_url, std::function<void(const std::string&)> wake_sender,
                   std::function<void(const std::string&)> resume_sender) {
  base_url_ = std::move(base_url);
  wake_sender_ = std::move(wake_sender);
  resume_sender_ = std::move(resume_sender);
  thread_ = std::thread([this] { run(); });
}

void Engine::stop() {
  queue_.stop();
  if (thread_.joinable()) thread_.join();
}

Engine::Legacy Engine::leave() {
  std::map<std::filesystem::path, InboxState> inboxes;
  const auto states = queue_.inboxes();
  for (std::size_t i = 0; i < states.size(); ++i) inboxes[inboxes_[i]] = states[i];
  return {std::move(journal_), before_ ? before_ : snapshot(), std::move(inboxes), settings_, arrivals_};
}

void Engine::remark_on_configuration(std::string words) {
  {
    const std::lock_guard lock(snapshot_mutex_);
    configuration_remark_ = std::move(words);
  }
  queue_.put(Task{});  // a turn, which publishes
}

void Engine::each_portion(AnalyzerIndex analyzer, const std::function<void(TakenPortion&&)>& take) {
  JournalReader(state_folder_).each_grown(settings_->of(analyzer).id, [&take](JournalFile&& file) {
    take({std::move(file.name), file.size, file.mtime_ns, std::move(file.sha256)});
  });
}

void Engine::run() noexcept {
  name_this_thread("engine");
  Work work{.pieces = {}, .tasks = {}, .tick = true, .stop = false};
  const auto turned = [this] {
    pulse_.rest();
    if (!std::exchange(turned_once_, true)) turned_.set_value();
  };
  while (!work.stop) {
    try {
      pulse_.step();
      turn(std::move(work));
      turned();
      work = queue_.take(trouble_.empty() ? kIdle : kTryAgain);
    } catch (const std::exception& error) {
      // No memory to tell of a batch: who waits for its answer hears that there is none and asks again.
      log_error("the engine goes on after: {}", error.what());
      work = {};
    }
  }
  fail(work, "the service is stopping");
  turned();
}

void Engine::turn(Work work) {
  const Instant now = now_utc();
  const std::int64_t sequence = journal_->head().sequence;
  std::vector<std::function<void()>> answers;
  try {
    if (!folded_) fold_from_journal(now);
    take_batch(work, now, answers);
    end_trouble(journal_->head().sequence != sequence);
  } catch (const std::exception& error) {
    undo(work, error.what());
    answers = {[this, &work] { fail(work, trouble_); }};
  }
  publish(now);
  for (const std::string& route : std::exchange(routes_with_news_, {})) wake_sender_(route);
  for (const auto& answer : answers) answer();
  journal_->write_back(anything_waits());
}

void Engine::undo(const Work& work, const std::string& why) {
  journal_->rollback();
  for (const QueuedPiece& queued : work.pieces) {
    refused_.insert(file_of(queued));
    queue_.still_waits(queued.piece.file.analyzer);
    queue_.refuse_round(queued.piece.file.analyzer, queued.piece.round, why);
  }
  folded_ = false;
  book_.reset();  // what it says was not committed; the snapshot keeps what was
  ledger_.forget();
  routes_with_news_.clear();
  if (trouble_ != why) log_error("the journal cannot be used; it is tried again: {}", why);
  trouble_ = why;
}

// As long as something waits, only what was refused and is now written shows that the journal can be used
// again: on a full disk a small piece may fit where the next does not.
void Engine::end_trouble(bool written) {
  if (trouble_.empty()) return;
  if (anything_waits() && !(written && refused_.empty())) return;
  log_info("the journal can be used again");
  trouble_.clear();
  refused_.clear();
  kept_fold_.reset();
}

bool Engine::anything_waits() const {
  const auto inboxes = queue_.inboxes();
  return std::any_of(inboxes.begin(), inboxes.end(),
                     [](const InboxState& inbox) { return inbox.pending > 0; });
}

void Engine::take_batch(Work& work, Instant now, std::vector<std::function<void()>>& answers) {
  journal_->begin(now);
  TakenIn taken;
  for (QueuedPiece& queued : work.pieces) {
    give_way();
    try {
      const PieceAnswer answer = ledger_.take(queued.piece, now, *journal_, monitor_, taken);
      answers.emplace_back([&queued, answer] { queued.answer.set_value(answer); });
    } catch (const PieceOutOfOrder&) {
      answers.emplace_back(
          [&queued, error = std::current_exception()] { queued.answer.set_exception(error); });
    }
  }
  for (const Task& task : work.tasks)
    if (task.take_in) task.take_in(taken);
  note_arrivals(taken, now);
  MonitorOutcome outcome = conclude(std::move(taken.events), taken.findings, now);
  for (const ComparisonIndex comparison : outcome.comparisons_paired) arrivals_.add_pair(comparison, now);
  lonely_.settle(lacks_partner());
  for (const ChartIndex chart : charts_to_recount(taken)) {
    count_censored(chart);
    outcome.charts_changed.insert(chart);
  }
  for (const Task& task : work.tasks)
    if (task.inside) task.inside(now);
  tell_lonely(now);
  watch(now);
  journal_->commit();
  for (const QueuedPiece& queued : work.pieces)
    if (queued.piece.last) refused_.erase(file_of(queued));
  refresh_views(outcome.charts_changed, outcome.comparisons_changed);
  for (Task& task : work.tasks)
    if (task.after) answers.emplace_back([&task] { task.after(""); });
}

MonitorOutcome Engine::conclude(std::vector<Event> events, const std::vector<Finding>& intake_findings,
                                Instant now) {
  JournalHistory history(*journal_, *settings_, &pulse_);
  MonitorOutcome outcome = monitor_.apply(std::move(events), history);
  const AfterFold after = after_fold();
  const auto tell_of = [&](Finding finding) {
    after.explain(finding);
    record(finding);
    tell(book_->apply(finding, now), now);
  };
  std::for_each(outcome.findings.begin(), outcome.findings.end(), tell_of);
  std::for_each(intake_findings.begin(), intake_findings.end(), tell_of);
  if (const auto subjects = after.refolded(outcome); !subjects.empty())
    reconcile(outcome, subjects, "late_data", now);
  for (const ComparisonIndex comparison : monitor_.explained_anew(outcome)) {
    outcome.comparisons_changed.insert(comparison);
    after.tell_anew(comparison, now,
                    [&](const std::vector<AlertTransition>& transitions) { tell(transitions, now); });
  }
  return outcome;
}

void Engine::note_arrivals(const TakenIn& taken, Instant now) {
  for (const Event& event : taken.events) {
    arrivals_.add(event, now);
    if (const auto* split = std::get_if<SplitReading>(&event)) lonely_.add(*split, now);
    if (const auto* intervention = std::get_if<Intervention>(&event)) book_->hold(*intervention);
  }
  for (const CheckReading& reading : taken.censored) arrivals_.add(reading, now);
}

MonitorOutcome Engine::fold_all() {
  const ChainHead head = journal_->head();
  if (kept_fold_ && kept_fold_->head == head) {
    monitor_ = kept_fold_->monitor;
    return kept_fold_->outcome;
  }
  monitor_ = Monitor(settings_);
  JournalHistory history(*journal_, *settings_, &pulse_);
  MonitorOutcome outcome = monitor_.fold_all(history);
  kept_fold_.reset();
  if (!trouble_.empty()) kept_fold_.emplace(Folded{head, monitor_, outcome});
  return outcome;
}

void Engine::remember_lonely() {
  lonely_.clear();
  const auto last_commit = journal_->last_commit();
  if (!last_commit) return;
  Duration longest{};
  for (const ComparisonSettings& comparison : settings_->comparisons)
    longest = std::max(longest, comparison.pair_within);
  JournalHistory(*journal_, *settings_)
      .each_split_received(
          *last_commit - longest - kIdle,
          [this](const SplitReading& result, Instant received) { lonely_.add(result, received); });
  lonely_.settle(lacks_partner());
  // Every batch tells of those that are due: these were told of then.
  (void)lonely_.due(*last_commit, lacks_partner());
}

void Engine::fold_from_journal(Instant now) {
  journal_->recover();
  std::vector<Alert> restored;
  for (const StoredTransition& transition : journal_->last_transitions())
    restored.push_back(alert_from_json(transition.body));
  book_ = std::make_unique<AlertBook>(alert_policy_, settings_, std::move(restored));
  escalated_.clear();
  for (const Intervention& intervention : JournalHistory(*journal_, *settings_).interventions())
    if (intervention.at + alert_policy_.hold > now) book_->hold(intervention);
  const MonitorOutcome outcome = fold_all();
  remember_lonely();
  if (journal_->totals().readings_censored > 0)
    for (std::uint32_t i = 0; i < settings_->charts.size(); ++i) count_censored({i});
  journal_->begin(now);
  const bool new_configuration = journal_->last_configuration_sha256() != config_sha256_;
  if (!configuration_recorded_) journal_->add_configuration(config_text_, config_sha256_, now);
  // Of all subjects: what is no longer configured holds no longer.
  reconcile(outcome, {}, new_configuration ? "configuration_changed" : "late_data", now, new_configuration);
  if (new_configuration) release_what_is_unwatched(now);
  tell_lonely(now);
  journal_->commit();
  refresh_views(outcome.charts_changed, outcome.comparisons_changed);
  journal_->release_memory();
  malloc_trim(0);  // a whole history went through memory; give it back
  configuration_recorded_ = folded_ = true;
  next_.config_since = journal_->last_configuration_since();
  before_.reset();
}

std::set<ChartIndex> Engine::charts_to_recount(const TakenIn& taken) const {
  std::set<ChartIndex> charts;
  const auto add = [&](const CheckReading& of) {
    if (const auto chart = monitor_.find_chart(of.analyzer, of.standard, of.measurand)) charts.insert(*chart);
  };
  std::for_each(taken.censored.begin(), taken.censored.end(), add);
  std::for_each(taken.taken_back.begin(), taken.taken_back.end(), add);
  return charts;
}

void Engine::count_censored(ChartIndex index) {
  const ChartSettings& chart = settings_->of(index);
  censored_[index.value] = journal_->censored_checks(
      settings_->of(chart.analyzer).id, settings_->of(chart.standard).id, settings_->of(chart.measurand).id);
}

void Engine::fail(Work& work, const std::string& why) {
  const auto error = std::make_exception_ptr(std::runtime_error(why));
  for (QueuedPiece& queued : work.pieces) queued.answer.set_exception(error);
  for (const Task& task : work.tasks)
    if (task.after) task.after(why);
}

}  // namespace agreed
