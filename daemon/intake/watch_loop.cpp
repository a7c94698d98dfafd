#include "daemon/intake/watch_loop.hpp"

#include <algorithm>
#include <system_error>

#include "daemon/clock.hpp"
#include "daemon/give_way.hpp"
#include "daemon/intake/archive.hpp"
#include "daemon/intake/file_names.hpp"
#include "daemon/intake/text.hpp"
#include "daemon/log.hpp"

namespace agreed {
namespace {

using Clock = std::chrono::steady_clock;
constexpr std::size_t kMostTold = 10'000;
constexpr auto kReportWithin = std::chrono::seconds(1);

bool same_growth(const InboxState& a, const InboxState& b) {
  return std::equal(a.growing.begin(), a.growing.end(), b.growing.begin(), b.growing.end(),
                    [](const GrowingState& one, const GrowingState& other) {
                      return one.name == other.name && one.taken == other.taken &&
                             one.unfinished == other.unfinished;
                    });
}

/// Whether the file ends as a complete one of its syntax does.
bool ends_complete(const FileContent& content, const PlainContext& context, const std::string& name) {
  if (is_json_array(context, name)) return content.last_mark() == ']';
  return content.ends_with_line_end();
}

}  // namespace

WatchLoop::WatchLoop(const IntakeSettings& intake, const Settings& settings, AnalyzerIndex analyzer,
                     IntakeSink& sink, const WatcherLimits& limits)
    : intake_(intake),
      settings_(settings),
      analyzer_(analyzer),
      sink_(sink),
      limits_(limits),
      zone_(std::make_shared<LocalZone>(intake.zone)),
      pulse_(std::make_shared<Pulse>()),
      inbox_(intake.inbox, intake.mode == FileMode::growing, limits.mount_table),
      waiting_(intake.settle, limits.unfinished),
      queue_(sink, limits.queue, *pulse_,
             [this](TakenFile& file, const PieceAnswer& answer, const std::string& error) {
               settle(file, answer, error);
             }) {
  if (intake.mode != FileMode::growing) return;
  growing_.emplace(intake.settle, limits,
                   GrowingIntake::Watcher{analyzer, sink, queue_, [this] { return context(); }, *pulse_,
                                          [this](const std::string& what, const std::string& words) {
                                            tell_once(what, words);
                                          }});
}

void WatchLoop::follow(const WatchLoop& before) {
  inbox_.remember(before.inbox_);
  if (growing_ || before.growing_) return;
  moved_ = before.moved_;
  unmoved_ = before.unmoved_;
}

void WatchLoop::run(const std::stop_token& stop) noexcept {
  while (!stop.stop_requested()) {
    try {
      turn(stop);
    } catch (const Stopping&) {
      return;
    } catch (const std::exception& error) {
      // Out of memory or descriptors, or a fault of ours: nothing is lost, the next scan tries again.
      try {
        log_warning("{}: {}", intake_.analyzer, std::string("intake is held up: ") + error.what());
        next_scan_ = Clock::now() + intake_.rescan;
        pulse_->rest();
        (void)inbox_.wait(next_scan_);
      } catch (...) {
        next_scan_ = {};
      }
    }
  }
}

void WatchLoop::turn(const std::stop_token& stop) {
  pulse_->step();
  if (Clock::now() >= next_scan_) scan(Clock::now(), stop);
  if (state_.reachable) {
    take_due(stop);
    queue_.drain(stop);
  }
  report(false);
  inbox_.close();
  pulse_->rest();
  Tick until = next_scan_;
  if (state_.reachable) until = std::min(until, next_due().value_or(until));
  const InboxEvents events = inbox_.wait(until);
  pulse_->step();
  note(events, Clock::now());
}

void WatchLoop::scan(Tick now, const std::stop_token& stop) {
  next_scan_ = now + intake_.rescan;
  try {
    reachable(inbox_.open());
    if (state_.reachable) {
      list(now);
      move_unmoved();
      look_again(now, stop);
    }
  } catch (const std::system_error& error) {
    reachable(std::string("the folder cannot be read: ") + error.what());
  }
  if (!state_.reachable) ++state_.failed_looks;
  if (!inbox_.no_events().empty())
    tell_once("events", inbox_.no_events() + "; files are found by scans only");
  report(true);
}

void WatchLoop::list(Tick now) {
  waiting_.begin_scan();
  if (growing_) growing_->begin_scan(now);
  for (const std::string& name : inbox_.names()) notice(name, Notice::scan, now);
  waiting_.end_scan();
  if (growing_) growing_->end_scan();
  state_.scanned_once = true;
}

void WatchLoop::notice(const std::string& name, Notice notice, Tick now) {
  pulse_->step();
  if (growing_) return notice_growing(name, notice, now);
  if (is_ignored_name(name) || unmoved_.contains(name)) return;
  if (!is_wanted(name)) return leave(name);
  if (const auto stamp = stamp_of(inbox_.folder(), name))
    waiting_.see(name, *stamp, notice, now);
  else
    waiting_.forget_unless_due(name);
}

void WatchLoop::notice_growing(const std::string& name, Notice notice, Tick now) {
  const auto stamp = stamp_of(inbox_.folder(), name);
  if (!stamp) return;
  if (!is_ignored_name(name) && is_wanted(name)) return growing_->see(name, *stamp, notice, now);
  growing_->see_other(name, *stamp, now);
  if (!is_ignored_name(name)) leave(name);
}

bool WatchLoop::is_wanted(const std::string& name) const {
  return !intake_.mapped || is_wanted_name(intake_.mapped->files, name);
}

std::optional<Tick> WatchLoop::next_due() const {
  return growing_ ? growing_->next_due() : waiting_.next_due();
}

void WatchLoop::leave(const std::string& name) {
  const auto stamp = stamp_of(inbox_.folder(), name);
  if (!stamp || stamp->directory) return;
  tell_once("left " + name, in_quotes(name) + " is left where it is: format " + intake_.mapped->id +
                                " does not take files of that name (files, ignore)");
}

void WatchLoop::note(const InboxEvents& events, Tick now) {
  if (events.lost) waiting_.events_lost(now);
  if (events.lost || events.gone) next_scan_ = now;
  if (events.named.empty() || !state_.reachable) return;
  try {
    reachable(inbox_.open());
    if (!state_.reachable) return;
    for (const InboxEvents::Named& event : events.named) notice(event.name, event.notice, now);
  } catch (const std::system_error&) {
    next_scan_ = now;  // it says what is wrong, or finds what was missed
  }
}

void WatchLoop::take_due(const std::stop_token& stop) {
  commit_failed_ = false;
  if (growing_) return take_due_growing(stop);
  const auto due = waiting_.take_due(Clock::now());
  if (!due.empty() && !inbox_.is_open()) reachable(inbox_.open());
  for (const auto& [name, waiting] : due) {
    if (stop.stop_requested()) throw Stopping{};
    give_way();
    try {
      if (state_.reachable && !commit_failed_)
        take(name, waiting, stop);
      else
        waiting_.retry_at_scan(name, commit_failed_);
    } catch (const std::exception& error) {
      tell_once(name, in_quotes(name) + " cannot be read now and is tried again: " + error.what());
      waiting_.retry_at_scan(name);
    }
  }
}

void WatchLoop::take_due_growing(const std::stop_token& stop) {
  if (growing_->next_due().value_or(Tick::max()) > Clock::now()) return;
  if (!inbox_.is_open()) reachable(inbox_.open());
  if (state_.reachable) growing_->take_due(inbox_.folder(), stop);
}

void WatchLoop::take(const std::string& name, const WaitingFile& waiting, const std::stop_token& stop) {
  const auto found = stamp_of(inbox_.folder(), name);
  if (!found || found->directory) return waiting_.forget(name);
  if (!found->regular)
    return refuse(name, *found, "it is no regular file (a link, a pipe or a device); a file was expected",
                  stop);
  const FileContent content(inbox_.folder(), name, pulse_.get());
  const FileStamp stamp = content.stamp();
  const Tick now = Clock::now();
  if (!waiting.finished() && !waiting.stamp.same_content(stamp)) return waiting_.changed(name, stamp, now);
  const bool incomplete =
      stamp.size == 0 || (!waiting.finished() && !ends_complete(content, context(), name));
  if (incomplete && waiting_.wait_unfinished(name, now)) return;
  if (stamp.size == 0)
    return refuse(name, stamp, "the file is empty; a header row or JSON was expected", stop);

  auto file = std::make_shared<TakenFile>();
  file->name = name;
  file->stamp = stamp;
  read(content, file, waiting.finished(), stop);
  if (file->dropped) waiting_.changed(name, content.stamp(), Clock::now());
  report(false);
}

void WatchLoop::refuse(const std::string& name, const FileStamp& stamp, std::string why,
                       const std::stop_token& stop) {
  auto file = std::make_shared<TakenFile>();
  file->name = name;
  file->stamp = stamp;
  queue_.submit(file, unreadable_piece(analyzer_, name, std::move(why)), stop);
}

void WatchLoop::read(const FileContent& content, const std::shared_ptr<TakenFile>& file, bool closed,
                     const std::stop_token& stop) {
  const ReadTask task{file->name, closed, intake_.on_bad_row, limits_.read, stop};
  const ReadOutcome outcome = read_file(content, task, context(), [&](FilePiece&& piece) {
    return queue_.submit(file, std::move(piece), stop);
  });
  file->dropped = outcome == ReadOutcome::changed;
}

void WatchLoop::look_again(Tick now, const std::stop_token& stop) {
  for (const MovedFiles::Moved& moved : moved_.look(inbox_.folder(), now)) {
    try {
      const FileContent content(inbox_.folder(), moved.path, pulse_.get());
      const bool stands_still = now - moved.changed >= limits_.unfinished;
      if (!ends_complete(content, context(), moved.name) && !stands_still) continue;
      auto file = std::make_shared<TakenFile>();
      file->name = moved.name;
      file->moved_path = moved.path;
      file->stamp = content.stamp();
      log_warning("{}: {}", intake_.analyzer,
                  in_quotes(moved.path) + " was written to after it was taken in; it is read again");
      read(content, file, false, stop);
    } catch (const std::system_error& error) {
      tell_once(moved.path, in_quotes(moved.path) + " cannot be read again: " + error.what());
    }
  }
}

void WatchLoop::settle(TakenFile& file, const PieceAnswer& answer, const std::string& error) {
  const bool in_inbox = file.moved_path.empty();
  if (file.failed) {
    tell_once("commit", "a commit failed, the files stay and are tried again at the next scan: " + error);
    if (in_inbox && !growing_) waiting_.retry_at_scan(file.name, true);
    commit_failed_ = true;
    return;
  }
  told_.erase("commit");
  give_way();
  if (growing_) return;
  if (!in_inbox) return moved_.read_again(file.moved_path, file.stamp);
  try {
    move(file, answer);
  } catch (const std::system_error& failure) {
    tell_once(file.name,
              in_quotes(file.name) + " was taken in but cannot be moved, it stays: " + failure.what());
    unmoved_[file.name] = {file, answer};
    waiting_.forget(file.name);
  }
}

void WatchLoop::move(const TakenFile& file, const PieceAnswer& answer) {
  const auto stamp = stamp_of(inbox_.folder(), file.name);
  waiting_.forget(file.name);
  told_.erase(file.name);
  if (!stamp) return;
  if (stamp->device != file.stamp.device || stamp->inode != file.stamp.inode)  // another file took its name
    return waiting_.see(file.name, *stamp, Notice::renamed_in, Clock::now());
  if (answer.outcome == FileOutcome::rejected) {
    const Archived to = move_to_rejected(inbox_.folder(), file.name, answer.reason);
    log_warning("{}: {}", intake_.analyzer,
                in_quotes(file.name) + " was rejected, see " + in_quotes(to.folder + "/" + to.name) +
                    " and its reason beside it");
    return;
  }
  const Archived to = move_to_done(inbox_.folder(), file.name, answer.committed_at);
  moved_.add(to.folder + "/" + to.name, file.name, file.stamp);
}

void WatchLoop::move_unmoved() {
  for (auto at = unmoved_.begin(); at != unmoved_.end();) {
    const Unmoved unmoved = at->second;
    const auto stamp = stamp_of(inbox_.folder(), unmoved.file.name);
    try {
      // One that was written to since is a new file, found by the next scan.
      if (stamp && stamp->same_content(unmoved.file.stamp)) move(unmoved.file, unmoved.answer);
      at = unmoved_.erase(at);
    } catch (const std::system_error& failure) {
      tell_once(unmoved.file.name,
                in_quotes(unmoved.file.name) + " still cannot be moved: " + failure.what());
      ++at;
    }
  }
}

void WatchLoop::reachable(const std::string& why_not) {
  const bool was_reachable = state_.reachable;
  state_.reachable = why_not.empty();
  state_.reason = why_not;
  if (state_.reachable) {
    state_.unreachable_since.reset();
    state_.failed_looks = 0;
    if (!was_reachable) log_info("{}: {}", intake_.analyzer, "watching " + in_quotes(intake_.inbox.string()));
    told_.erase("inbox");
  } else {
    if (!state_.unreachable_since) state_.unreachable_since = now_utc();
    tell_once("inbox",
              in_quotes(intake_.inbox.string()) + ": " + why_not + "; it is tried again at each scan");
  }
}

void WatchLoop::report(bool always) {
  state_.pending = waiting_.size();
  if (growing_) {
    state_.pending = growing_->pending();
    state_.growing = growing_->states();
  }
  const Tick now = Clock::now();
  const bool news = state_.reachable != reported_.reachable || state_.reason != reported_.reason ||
                    state_.scanned_once != reported_.scanned_once;
  const bool count_is_old = (state_.pending != reported_.pending || !same_growth(state_, reported_)) &&
                            (now - last_report_ >= kReportWithin || state_.pending == 0);
  if (!always && !news && !count_is_old) return;
  sink_.report(analyzer_, state_);
  reported_ = state_;
  last_report_ = now;
}

void WatchLoop::tell_once(const std::string& what, const std::string& words) {
  if (told_.size() > kMostTold) told_.clear();
  std::string& told = told_[what];
  if (told == words) return;
  told = words;
  log_warning("{}: {}", intake_.analyzer, words);
}

PlainContext WatchLoop::context() const {
  return {settings_, analyzer_,     standards_of(settings_, analyzer_), zone_, intake_.not_before,
          now_utc(), intake_.mapped};
}

}  // namespace agreed
