#include "daemon/engine/engine.hpp"

#include <algorithm>

#include <malloc.h>

#include "core/alert/cause.hpp"
#include "core/base/rfc3339.hpp"
#include "daemon/clock.hpp"
#include "daemon/engine/journal_history.hpp"
#include "daemon/engine/service_watch.hpp"
#include "daemon/log.hpp"
#include "daemon/render/alert_json.hpp"
#include "daemon/render/finding_json.hpp"
#include "daemon/render/status_json.hpp"
#include "daemon/sha256.hpp"
#include "daemon/webhook/cloud_event.hpp"
#include "daemon/webhook/routing.hpp"

namespace agreed {
namespace {

// How long the engine sleeps when nothing comes: only a longstop, everything that happens wakes it.
constexpr Duration kIdle = std::chrono::minutes(1);
// While the journal cannot be used: how long until it is tried again.
constexpr Duration kTryAgain = std::chrono::seconds(2);
// Between two looks at the clock, the disk and the endpoints, while batches follow each other.
constexpr Duration kLookEvery = std::chrono::seconds(1);
constexpr const char* kHeartbeat = "agreed.heartbeat";

std::pair<AnalyzerIndex, std::string> file_of(const QueuedPiece& queued) {
  return {queued.piece.file.analyzer, queued.piece.file.name};
}

}  // namespace

Engine::Engine(const Config& config, std::unique_ptr<Journal> journal)
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
      arrivals_(*settings_, now_utc()),
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

void Engine::each_portion(AnalyzerIndex analyzer, const std::function<void(TakenPortion&&)>& take) {
  JournalReader(state_folder_).each_grown(settings_->of(analyzer).id, [&take](JournalFile&& file) {
    take({std::move(file.name), file.size, file.mtime_ns, std::move(file.sha256)});
  });
}

std::shared_ptr<const Snapshot> Engine::snapshot() const {
  const std::lock_guard lock(snapshot_mutex_);
  return snapshot_;
}

std::future<AskAnswer> Engine::ask(std::function<void(AskAnswer&, Instant)> inside,
                                   std::function<void(const AskAnswer&)> after) {
  auto answer = std::make_shared<AskAnswer>();
  Task task;
  task.inside = [inside = std::move(inside), answer](Instant now) { inside(*answer, now); };
  return answered(std::move(task), answer, std::move(after));
}

std::future<AskAnswer> Engine::answered(Task task, const std::shared_ptr<AskAnswer>& answer,
                                        std::function<void(const AskAnswer&)> after) {
  auto promise = std::make_shared<std::promise<AskAnswer>>();
  auto future = promise->get_future();
  task.after = [promise, answer, after = std::move(after)](const std::string& failure) {
    if (!failure.empty()) *answer = {AskOutcome::unavailable, failure};
    after(*answer);
    promise->set_value(*answer);
  };
  if (!queue_.put(std::move(task))) promise->set_value({AskOutcome::unavailable, "the service is stopping"});
  return future;
}

std::future<AskAnswer> Engine::acknowledge(std::int64_t alert, std::string by, std::string note) {
  return ask([this, alert, by = std::move(by), note = std::move(note)](AskAnswer& answer, Instant now) {
    try {
      tell(book_->acknowledge(alert, by, note, now), now);
    } catch (const std::out_of_range&) {
      answer = {AskOutcome::not_found, "There is no alert " + std::to_string(alert) + "."};
    } catch (const std::logic_error& error) {
      answer = {AskOutcome::not_possible, error.what()};
    }
  });
}

std::future<AskAnswer> Engine::resend(std::string message) {
  return ask([this, message = std::move(message)](AskAnswer& answer,
                                                  Instant now) { answer = send_again(message, now); },
             [this](const AskAnswer& answer) {
               if (answer.outcome == AskOutcome::done) resume_sender_(answer.words);
             });
}

std::future<AskAnswer> Engine::intervene(ToldIntervention told) {
  auto read = interventions_.read(told, now_utc());
  if (const auto* fault = std::get_if<FieldFault>(&read)) {
    std::promise<AskAnswer> at_once;
    at_once.set_value({AskOutcome::not_usable, fault->reason, std::string(fault->field)});
    return at_once.get_future();
  }
  auto answer = std::make_shared<AskAnswer>();
  Task task;
  task.take_in = [this, row = std::get<Row>(std::move(read)), answer](TakenIn& taken) {
    *answer = take_told(row, taken);
  };
  return answered(std::move(task), answer, [](const AskAnswer&) {});
}

AskAnswer Engine::take_told(const Row& row, TakenIn& taken) {
  KeptIntervention kept = ledger_.take_told(row, *journal_, taken);
  AskAnswer answer;
  if (!kept.is_new) {
    const JournalIntervention& stands = kept.stored;
    answer.outcome = AskOutcome::done_before;
    if (stands.by != row.by || stands.note != row.note)
      return {AskOutcome::not_possible, "The same intervention is known already, told by \"" + stands.by +
                                            "\" with the note \"" + stands.note + "\", and stands."};
  }
  answer.intervention = std::move(kept.stored);
  return answer;
}

AskAnswer Engine::send_again(const std::string& message, Instant now) {
  const AskedAgain asked = journal_->ask_again(message);
  if (asked.answer == SendAgain::unknown)
    return {AskOutcome::not_found, "There is no message " + message + "."};
  if (asked.answer == SendAgain::waits_already)
    return {AskOutcome::not_possible,
            "The message waits to be sent to route " + asked.route + " anyway; its deliveries tell when."};
  if (std::none_of(routes_.begin(), routes_.end(),
                   [&](const Route& route) { return route.name == asked.route; }))
    return {AskOutcome::not_possible,
            "The message's route " + asked.route + " is not in the configuration any more."};
  journal_->send_again(message, now);
  return {AskOutcome::done, asked.route};
}

std::future<void> Engine::record(DeliveryTry attempt) {
  auto promise = std::make_shared<std::promise<void>>();
  auto future = promise->get_future();
  Task task;
  task.inside = [this, attempt = std::move(attempt)](Instant) { journal_->add_try(attempt); };
  task.after = [promise](const std::string& failure) {
    if (failure.empty()) return promise->set_value();
    promise->set_exception(std::make_exception_ptr(std::runtime_error(failure)));
  };
  if (!queue_.put(std::move(task)))
    promise->set_exception(std::make_exception_ptr(std::runtime_error("the service is stopping")));
  return future;
}

void Engine::run() noexcept {
  Work work{.pieces = {}, .tasks = {}, .tick = true, .stop = false};
  while (!work.stop) {
    try {
      turn(std::move(work));
      work = queue_.take(trouble_.empty() ? kIdle : kTryAgain);
    } catch (const std::exception& error) {
      // No memory to tell of a batch: who waits for its answer hears that there is none and asks again.
      log_error("the engine goes on after: {}", error.what());
      work = {};
    }
  }
  fail(work, "the service is stopping");
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
    queue_.refuse_waiting(queued.piece.file.analyzer, why);
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

std::vector<Subject> Engine::refolded(const MonitorOutcome& outcome) const {
  std::vector<Subject> subjects;
  subjects.reserve(outcome.charts_refolded.size() + outcome.comparisons_refolded.size());
  for (const ChartIndex chart : outcome.charts_refolded) subjects.push_back(subject_of(*settings_, chart));
  for (const ComparisonIndex comparison : outcome.comparisons_refolded)
    subjects.push_back(subject_of(*settings_, comparison));
  return subjects;
}

MonitorOutcome Engine::conclude(std::vector<Event> events, const std::vector<Finding>& intake_findings,
                                Instant now) {
  JournalHistory history(*journal_, *settings_);
  MonitorOutcome outcome = monitor_.apply(std::move(events), history);
  const auto tell_of = [&](Finding finding) {
    explain(finding);
    record(finding);
    tell(book_->apply(finding, now), now);
  };
  std::for_each(outcome.findings.begin(), outcome.findings.end(), tell_of);
  std::for_each(intake_findings.begin(), intake_findings.end(), tell_of);
  if (const auto subjects = refolded(outcome); !subjects.empty())
    reconcile(outcome, subjects, "late_data", now);
  for (const ComparisonIndex comparison : monitor_.explained_anew(outcome)) {
    outcome.comparisons_changed.insert(comparison);
    tell_anew(comparison, now);
  }
  return outcome;
}

void Engine::record(const Finding& finding) {
  journal_->add_finding(finding.at, to_string(finding.kind), subject_json(finding.subject),
                        finding_json(finding));
}

void Engine::note_arrivals(const TakenIn& taken, Instant now) {
  for (const Event& event : taken.events) {
    arrivals_.add(event, now);
    if (const auto* split = std::get_if<SplitReading>(&event)) lonely_.add(*split, now);
    if (const auto* intervention = std::get_if<Intervention>(&event)) book_->hold(*intervention);
  }
  for (const CheckReading& reading : taken.censored) arrivals_.add(reading, now);
}

// What the clock, the disk and the endpoints say. A condition that goes on is told once.
void Engine::watch(Instant now) {
  if (now >= watched_at_ && now - watched_at_ < kLookEvery) return;
  watched_at_ = now;
  std::vector<Finding> findings = overdue_findings(*settings_, alert_policy_.overdue, arrivals_, now);
  for (Finding& finding : inbox_findings(*settings_, inboxes_, queue_.inboxes(), now))
    findings.push_back(std::move(finding));
  if (const auto room = room_for(state_folder_))
    if (auto finding = storage_finding(state_folder_, *room, least_free_mb_, now))
      findings.push_back(std::move(*finding));
  for (const Route& route : routes_)
    if (auto finding = delivery_finding(route, journal_->failing(route.name), now))
      findings.push_back(std::move(*finding));
  for (const Finding& finding : findings) {
    const auto transitions = book_->apply(finding, now);
    if (transitions.empty()) continue;
    record(finding);
    tell(transitions, now);
  }
  tell(book_->tick(now), now);
  tell_unacknowledged(now);
  beat(now);
}

LonelyHalves::LacksPartner Engine::lacks_partner() const {
  return [this](ComparisonIndex comparison, const SplitReading& result) {
    return monitor_.lacks_partner(comparison, result);
  };
}

void Engine::tell_lonely(Instant now) {
  for (const Finding& finding : lonely_.due(now, lacks_partner())) {
    record(finding);
    tell(book_->apply(finding, now), now);
  }
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

void Engine::tell_unacknowledged(Instant now) {
  const auto current = book_->current();
  for (const Escalation& due : escalations(current, routes_, *settings_, now)) {
    const Alert& alert = *due.alert;
    const std::string& route = routes_[due.route].name;
    if (!escalated_.insert({alert.id, alert.opened_at, due.route}).second) continue;
    if (journal_->has_message(alert.id, route, alert.opened_at)) continue;
    send(route, {AlertChange::opened, now, true, alert}, alert_json(alert, base_url_), now);
  }
}

// While the newest sign of life still waits to be delivered, another would say nothing more.
void Engine::beat(Instant now) {
  for (const Route& route : routes_) {
    if (!route.heartbeat) continue;
    const auto last = journal_->last_message(route.name, kHeartbeat);
    if (last && (last->waits || (last->created_at <= now && now - last->created_at < *route.heartbeat)))
      continue;
    const std::string id = make_webhook_id();
    put_in_outbox(
        route.name, id, kHeartbeat,
        to_json(heartbeat_event(journal_->source(), id, settings_->site, chain_json(journal_->head()), now)),
        0, now);
  }
}

void Engine::explain(Finding& finding) const {
  if (!has_cause(finding)) return;
  for (std::uint32_t i = 0; i < settings_->comparisons.size(); ++i) {
    if (settings_->comparisons[i].id != finding.subject.comparison) continue;
    if (const auto change = monitor_.explain({i}))
      add_cause(finding, change->diagnosis, change->look_back,
                book_->find_current(finding.kind, finding.subject));
  }
}

void Engine::tell_anew(ComparisonIndex comparison, Instant now) {
  for (Finding& finding : monitor_.conditions(comparison)) {
    if (!has_cause(finding) || book_->find_current(finding.kind, finding.subject) == nullptr) continue;
    explain(finding);
    tell(book_->apply(finding, now), now);
  }
}

void Engine::reconcile(const MonitorOutcome& outcome, const std::vector<Subject>& subjects,
                       const std::string& reason, Instant now, bool news) {
  std::vector<Finding> conditions;
  const auto add = [&conditions](std::vector<Finding> more) {
    conditions.insert(conditions.end(), std::make_move_iterator(more.begin()),
                      std::make_move_iterator(more.end()));
  };
  for (const ChartIndex chart : outcome.charts_refolded) add(monitor_.conditions(chart));
  for (const ComparisonIndex comparison : outcome.comparisons_refolded) {
    add(monitor_.conditions(comparison));
    tell(book_->admit_outliers(settings_->of(comparison).id, outcome.set_aside.at(comparison), now), now);
  }
  for (Finding& condition : conditions) explain(condition);
  tell(book_->reconcile(conditions, subjects, reason, now, news), now);
}

void Engine::tell(const std::vector<AlertTransition>& transitions, Instant now) {
  for (const AlertTransition& transition : transitions) {
    const std::string body = alert_json(transition.alert, base_url_);
    journal_->add_transition({transition.alert.id, transition.at, to_string(transition.change), body});
    if (!transition.tell) continue;
    for (const std::size_t position : routes_for(transition, routes_, *settings_))
      send(routes_[position].name, transition, body, now);
  }
}

void Engine::send(const std::string& route, const AlertTransition& transition, const std::string& body,
                  Instant now) {
  const std::string id = make_webhook_id();
  put_in_outbox(route, id, event_type(transition.change),
                to_json(alert_event(transition, journal_->source(), id, body)), transition.alert.id, now);
}

void Engine::put_in_outbox(const std::string& route, const std::string& id, std::string type,
                           std::string body, std::int64_t alert, Instant now) {
  OutboxMessage message;
  message.webhook_id = id;
  message.route = route;
  message.type = std::move(type);
  message.body = std::move(body);
  message.alert = alert;
  message.created_at = message.due_at = now;
  journal_->add_message(message);
  routes_with_news_.insert(route);
}

MonitorOutcome Engine::fold_all() {
  const ChainHead head = journal_->head();
  if (kept_fold_ && kept_fold_->head == head) {
    monitor_ = kept_fold_->monitor;
    return kept_fold_->outcome;
  }
  monitor_ = Monitor(settings_);
  JournalHistory history(*journal_, *settings_);
  MonitorOutcome outcome = monitor_.fold_all(history);
  kept_fold_.reset();
  if (!trouble_.empty()) kept_fold_.emplace(Folded{head, monitor_, outcome});
  return outcome;
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
  tell_lonely(now);
  journal_->commit();
  refresh_views(outcome.charts_changed, outcome.comparisons_changed);
  journal_->release_memory();
  malloc_trim(0);  // a whole history went through memory; give it back
  configuration_recorded_ = folded_ = true;
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

void Engine::publish(Instant now) {
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
  auto snapshot = std::make_shared<const Snapshot>(next_);
  const std::lock_guard lock(snapshot_mutex_);
  snapshot_ = std::move(snapshot);
}

}  // namespace agreed
