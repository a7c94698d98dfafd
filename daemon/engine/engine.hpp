#pragma once
// The engine: one thread that owns the journal, the monitor and the alert book. Everything that happens
// reaches it through one queue; everything anyone sees of it is an immutable snapshot.
#include <atomic>
#include <functional>
#include <future>
#include <map>
#include <memory>
#include <mutex>
#include <optional>
#include <set>
#include <string>
#include <thread>

#include "config/config.hpp"
#include "core/alert/after_fold.hpp"
#include "core/alert/alert_book.hpp"
#include "core/alert/lonely_halves.hpp"
#include "core/monitor/monitor.hpp"
#include "daemon/engine/file_ledger.hpp"
#include "daemon/engine/service.hpp"
#include "daemon/engine/work_queue.hpp"

namespace agreed {

class Engine final : public IntakeSink, public Service {
 public:
  /// What a stopped engine leaves to the one that takes its place under another configuration.
  struct Legacy {
    std::unique_ptr<Journal> journal;
    std::shared_ptr<const Snapshot> snapshot;
    std::map<std::filesystem::path, InboxState> inboxes;
    std::shared_ptr<const Settings> settings;
    Arrivals arrivals;
  };

  Engine(const Config& config, std::unique_ptr<Journal> journal);
  /// Until the journal is folded its snapshot goes on showing what the engine before showed.
  Engine(const Config& config, Legacy legacy);
  ~Engine() override;

  /// `base_url`: where the pages are, for links. `wake_sender(route)` is called after messages for it were
  /// committed, `resume_sender(route)` after somebody asked for one again: also an endpoint that is gone
  /// (410) is then tried.
  void start(
      std::string base_url, std::function<void(const std::string& route)> wake_sender,
      std::function<void(const std::string& route)> resume_sender = [](const std::string&) {});
  /// Ends after the batch in hand; nothing is taken from then on.
  void stop();
  /// After stop: only snapshot() may be asked from then on.
  [[nodiscard]] Legacy leave();
  /// Ready when the journal was first folded, or could not be, or the engine has stopped before.
  [[nodiscard]] std::shared_future<void> first_turn() const { return first_turn_; }
  /// Since when it has been at one piece of work; nothing while it waits for some.
  [[nodiscard]] std::optional<Pulse::Clock::time_point> busy_since() const { return pulse_.stepping_since(); }
  /// What is wrong with the configuration file, among the remarks from now on; empty: nothing.
  void remark_on_configuration(std::string words);

  std::future<PieceAnswer> submit(FilePiece piece) override { return queue_.put(std::move(piece)); }
  void each_portion(AnalyzerIndex analyzer, const std::function<void(TakenPortion&&)>& take) override;
  void report(AnalyzerIndex analyzer, const InboxState& state) override { queue_.report(analyzer, state); }

  /// As WorkQueue::watch_over.
  void watch_over(AnalyzerIndex analyzer, std::shared_ptr<const Pulse> pulse, Duration rescan) {
    queue_.watch_over(analyzer, std::move(pulse), rescan);
  }

  [[nodiscard]] std::shared_ptr<const Snapshot> snapshot() const override;
  [[nodiscard]] std::filesystem::path state() const override { return state_folder_; }
  std::future<AskAnswer> acknowledge(std::int64_t alert, std::string by, std::string note) override;
  std::future<AskAnswer> resend(std::string message) override;
  std::future<AskAnswer> intervene(ToldIntervention told) override;
  /// Journals a try to deliver a message; the future throws if it could not be committed.
  std::future<void> record(DeliveryTry attempt);

 private:
  /// A task whose answer is given once it is committed.
  std::future<AskAnswer> ask(
      std::function<void(AskAnswer&, Instant now)> inside,
      std::function<void(const AskAnswer&)> after = [](const AskAnswer&) {});
  /// Puts `task` into the queue; `answer`, which it fills, is given when its batch is through.
  std::future<AskAnswer> answered(Task task, const std::shared_ptr<AskAnswer>& answer,
                                  std::function<void(const AskAnswer&)> after);
  [[nodiscard]] AskAnswer take_told(const Row& row, TakenIn& taken);
  [[nodiscard]] AskAnswer send_again(const std::string& message, Instant now);
  Engine(const Config& config, std::unique_ptr<Journal> journal, Arrivals arrivals);
  void run() noexcept;
  void turn(Work work);
  void take_batch(Work& work, Instant now, std::vector<std::function<void()>>& answers);
  MonitorOutcome conclude(std::vector<Event> events, const std::vector<Finding>& intake_findings,
                          Instant now);
  [[nodiscard]] AfterFold after_fold() const;
  /// Compares the alert book with what holds after a fold; `subjects` and `news` as in AlertBook::reconcile.
  void reconcile(const MonitorOutcome& outcome, const std::vector<Subject>& subjects,
                 const std::string& reason, Instant now, bool news = true);
  void tell(const std::vector<AlertTransition>& transitions, Instant now);
  void fold_from_journal(Instant now);
  [[nodiscard]] std::set<ChartIndex> charts_to_recount(const TakenIn& taken) const;
  void count_censored(ChartIndex index);
  void record(const Finding& finding);
  void note_arrivals(const TakenIn& taken, Instant now);
  void watch(Instant now);
  /// Halves of split samples whose partner did not come in time.
  void tell_lonely(Instant now);
  /// Those that the journal has, but not what was told of before its last commit.
  void remember_lonely();
  [[nodiscard]] LonelyHalves::LacksPartner lacks_partner() const;
  /// Routes that hear only of what nobody acknowledged in time.
  void tell_unacknowledged(Instant now);
  /// Signs of life to the routes that asked for them.
  void beat(Instant now);
  void send(const std::string& route, const AlertTransition& transition, const std::string& body,
            Instant now);
  void put_in_outbox(const std::string& route, const std::string& id, std::string type, std::string body,
                     std::int64_t alert, Instant now);
  [[nodiscard]] MonitorOutcome fold_all();
  void undo(const Work& work, const std::string& why);
  void end_trouble(bool written);
  [[nodiscard]] bool anything_waits() const;
  void fail(Work& work, const std::string& why);

  void publish(Instant now);
  /// As long as there is nothing of one's own to show.
  [[nodiscard]] Snapshot as_before() const;
  void release_what_is_unwatched(Instant now);
  void refresh_views(const std::set<ChartIndex>& charts, const std::set<ComparisonIndex>& comparisons);
  [[nodiscard]] std::vector<std::string> not_ready(const std::vector<InboxState>& inboxes) const;

  const std::shared_ptr<const Settings> settings_;
  const std::vector<Route> routes_;
  const AlertPolicy alert_policy_;
  const std::filesystem::path state_folder_;
  const std::optional<double> least_free_mb_;
  std::vector<std::filesystem::path> inboxes_;
  const InterventionReader interventions_;
  const std::string config_sha256_;
  const std::string config_text_;
  std::string base_url_;
  std::function<void(const std::string&)> wake_sender_, resume_sender_;

  WorkQueue queue_;
  std::unique_ptr<Journal> journal_;
  Monitor monitor_;
  FileLedger ledger_;
  std::vector<std::int64_t> censored_;  ///< results of each chart that it leaves out
  Arrivals arrivals_;
  LonelyHalves lonely_;
  Instant watched_at_{};
  /// What was told so far of alerts that nobody acknowledged: alert, its opening, route.
  std::set<std::tuple<std::int64_t, Instant, std::size_t>> escalated_;
  std::unique_ptr<AlertBook> book_;
  std::set<std::string> routes_with_news_;
  std::string trouble_;  ///< why what waits could not be committed; empty when nothing was refused
  std::set<std::pair<AnalyzerIndex, std::string>> refused_;  ///< files that wait since
  bool folded_ = false;

  /// What the journal folds to. Kept only while batches fail, so that each try need not fold it all again.
  struct Folded {
    ChainHead head;
    Monitor monitor;
    MonitorOutcome outcome;
  };
  std::optional<Folded> kept_fold_;
  bool configuration_recorded_ = false;

  std::shared_ptr<const Snapshot> before_;  ///< of the engine before, until the journal is folded
  Pulse pulse_;
  std::promise<void> turned_;
  std::shared_future<void> first_turn_ = turned_.get_future().share();
  bool turned_once_ = false;

  Snapshot next_;  ///< the snapshot in the making
  mutable std::mutex snapshot_mutex_;
  std::shared_ptr<const Snapshot> snapshot_;
  std::string configuration_remark_;  ///< by snapshot_mutex_ too
  std::thread thread_;
};

}  // namespace agreed
