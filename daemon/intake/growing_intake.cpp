#include "daemon/intake/growing_intake.hpp"

#include <algorithm>
#include <chrono>
#include <tuple>

#include "daemon/clock.hpp"
#include "daemon/intake/text.hpp"

namespace agreed {
namespace {

using Clock = std::chrono::steady_clock;
constexpr std::size_t kMostRecent = 5'000;  // portions by which a renamed file is recognised
constexpr std::size_t kMostOpen = 16;       // files whose reader is kept between two changes
constexpr std::size_t kMostLinesShown = 20;

}  // namespace

void GrowingIntake::see(const std::string& name, const FileStamp& stamp, Notice notice, Tick now) {
  if (stamp.directory) return;
  if (!stamp.regular)
    return watcher_.tell(
        name, in_quotes(name) + " is passed over: it is no regular file (a link, a pipe or a device)");
  auto [at, is_new] = files_.try_emplace(Identity{stamp.device, stamp.inode});
  Followed& followed = at->second;
  followed.scan = scan_;
  if (is_new) {
    followed.name = name;
  } else if (followed.name != name && stamp.links == 1) {
    followed.name = name;
    followed.renamed = true;
    followed.rest_told = false;  // its line end will hardly come any more
    followed.due = now;
  }
  const bool at_once = notice == Notice::closed || notice == Notice::renamed_in;
  if (is_new || !followed.seen.same_content(stamp)) return note_change(followed, stamp, at_once, now);
  if (at_once && followed.waits) followed.due = now;
}

void GrowingIntake::see_other(const std::string& name, const FileStamp& stamp, Tick now) {
  if (files_.contains({stamp.device, stamp.inode})) see(name, stamp, Notice::scan, now);
}

void GrowingIntake::note_change(Followed& followed, const FileStamp& stamp, bool at_once, Tick now) {
  const Tick due = at_once ? now : now + settle_;
  followed.due = followed.waits && followed.due ? std::min(*followed.due, due) : due;
  followed.waits = true;
  followed.rest_told = false;
  followed.seen = stamp;
  followed.changed = now;
}

void GrowingIntake::begin_scan(Tick now) {
  ++scan_;
  for (auto& [identity, followed] : files_)
    if (std::exchange(followed.failed, false)) followed.due = now;
}

void GrowingIntake::end_scan() {
  std::erase_if(files_, [this](const auto& entry) { return entry.second.scan != scan_; });
}

void GrowingIntake::take_due(int folder, const std::stop_token& stop) {
  const Tick now = Clock::now();
  std::vector<Followed*> due;
  for (auto& [identity, followed] : files_)
    if (followed.due && *followed.due <= now) due.push_back(&followed);
  // A file renamed away holds what is older than in the one begun anew.
  std::sort(due.begin(), due.end(), [](const Followed* a, const Followed* b) {
    return std::tie(a->seen.mtime_ns, a->name) < std::tie(b->seen.mtime_ns, b->name);
  });
  for (Followed* followed : due) {
    if (stop.stop_requested()) throw Stopping{};
    try {
      take(*followed, folder, stop);
    } catch (const std::exception& error) {
      watcher_.tell(followed->name,
                    in_quotes(followed->name) + " cannot be read now and is tried again: " + error.what());
      try_later(*followed);
    }
  }
  keep_few_open();
}

void GrowingIntake::take(Followed& followed, int folder, const std::stop_token& stop) {
  load_known();
  watcher_.pulse.step();
  const auto found = stamp_of(folder, followed.name);
  if (!found || found->device != followed.seen.device || found->inode != followed.seen.inode) {
    followed.due.reset();  // renamed away a moment ago; an event or the next scan says where to
    return;
  }
  const FileContent content(folder, followed.name, &watcher_.pulse);
  const FileStamp stamp = content.stamp();
  place(followed, content);
  if (!read_on(followed, content, stop)) return try_later(followed);
  const FileStamp left = content.stamp();
  if (!left.same_content(stamp)) {  // it grew meanwhile
    followed.waits = false;
    return note_change(followed, left, false, Clock::now());
  }
  followed.seen = stamp;
  followed.waits = false;
  followed.due.reset();
  look_at_rest(followed, content, stop);
}

void GrowingIntake::place(Followed& followed, const FileContent& content) {
  if (followed.file && followed.file->begins_as_taken(content)) return;
  const bool was_known = followed.file != nullptr;
  const FileStamp stamp = content.stamp();
  followed.file =
      std::make_unique<GrowingFile>(watcher_.context(), plain_syntax_of(followed.name), limits_.read);
  const auto last = last_by_name_.find(followed.name);
  if (!was_known && last != last_by_name_.end() && last->second.size == stamp.size &&
      last->second.mtime_ns == stamp.mtime_ns)
    followed.file->place_at(last->second);
  else
    followed.file->place(content, known());
  if (was_known) followed.renamed = false;
  if (was_known)
    watcher_.tell(followed.name + " anew",
                  in_quotes(followed.name) + " was cut or written anew; it is read on from byte " +
                      std::to_string(followed.file->taken()) + ", up to which it is known");
  followed.taken = followed.file->taken();
}

bool GrowingIntake::read_on(Followed& followed, const FileContent& content, const std::stop_token& stop) {
  while (auto piece = followed.file->read_on(content, followed.name, now_utc())) {
    const FileIdentity file = piece->file;
    const bool usable = piece->unusable.empty();
    if (!hand_over(followed, content.stamp(), std::move(*piece), stop)) return false;
    if (usable) know({file.name, file.size, file.mtime_ns, file.sha256});
    followed.taken = followed.file->taken();
  }
  return true;
}

bool GrowingIntake::hand_over(const Followed& followed, const FileStamp& stamp, FilePiece&& piece,
                              const std::stop_token& stop) {
  auto file = std::make_shared<TakenFile>();
  file->name = followed.name;
  file->stamp = stamp;
  file->growing = true;
  // One portion after the other: a later one must not be known as taken with a hole before it.
  watcher_.queue.submit(file, std::move(piece), stop);
  watcher_.queue.drain(stop);
  return !file->failed;
}

void GrowingIntake::look_at_rest(Followed& followed, const FileContent& content,
                                 const std::stop_token& stop) {
  const FileStamp& stamp = followed.seen;
  if (followed.rest_told || stamp.size <= followed.taken) return;
  const Tick until = followed.changed + limits_.unfinished;
  if (Clock::now() < until) {
    followed.due = until;
    return;
  }
  followed.rest_told = true;
  if (!followed.renamed)
    return watcher_.tell(followed.name + " rest", "the last line of " + in_quotes(followed.name) +
                                                      " has no line end; it waits for it");
  FilePiece piece;
  piece.file = {watcher_.analyzer, followed.name, followed.taken, stamp.mtime_ns, followed.file->sha256()};
  piece.last = piece.growing = true;
  piece.bad.push_back(followed.file->unfinished_line(content));
  if (!hand_over(followed, stamp, std::move(piece), stop)) try_later(followed);
}

void GrowingIntake::try_later(Followed& followed) {
  followed.file.reset();
  followed.due.reset();
  followed.waits = followed.failed = true;
  followed.rest_told = false;
}

void GrowingIntake::keep_few_open() {
  std::vector<Followed*> open;
  for (auto& [identity, followed] : files_)
    if (followed.file) open.push_back(&followed);
  if (open.size() <= kMostOpen) return;
  std::sort(open.begin(), open.end(),
            [](const Followed* a, const Followed* b) { return a->changed > b->changed; });
  for (std::size_t i = kMostOpen; i < open.size(); ++i) open[i]->file.reset();
}

void GrowingIntake::load_known() {
  if (loaded_) return;
  watcher_.sink.each_portion(watcher_.analyzer, [this](TakenPortion&& portion) { know(std::move(portion)); });
  loaded_ = true;
}

void GrowingIntake::know(TakenPortion&& portion) {
  last_by_name_[portion.name] = portion;
  recent_.push_back(std::move(portion));
  if (recent_.size() > kMostRecent) recent_.pop_front();
}

std::vector<TakenPortion> GrowingIntake::known() const {
  std::vector<TakenPortion> all(recent_.begin(), recent_.end());
  for (const auto& [name, portion] : last_by_name_) all.push_back(portion);
  return all;
}

std::optional<Tick> GrowingIntake::next_due() const {
  std::optional<Tick> next;
  for (const auto& [identity, followed] : files_)
    if (followed.due) next = std::min(next.value_or(*followed.due), *followed.due);
  return next;
}

std::size_t GrowingIntake::pending() const {
  return static_cast<std::size_t>(
      std::count_if(files_.begin(), files_.end(), [](const auto& entry) { return entry.second.waits; }));
}

std::vector<GrowingState> GrowingIntake::states() const {
  std::vector<const Followed*> newest;
  for (const auto& [identity, followed] : files_) newest.push_back(&followed);
  std::sort(newest.begin(), newest.end(),
            [](const Followed* a, const Followed* b) { return a->seen.mtime_ns > b->seen.mtime_ns; });
  if (newest.size() > kMostLinesShown) newest.resize(kMostLinesShown);
  std::sort(newest.begin(), newest.end(),
            [](const Followed* a, const Followed* b) { return a->name < b->name; });
  std::vector<GrowingState> states;
  states.reserve(newest.size());
  for (const Followed* followed : newest)
    states.push_back({followed->name, followed->taken,
                      followed->seen.size > followed->taken ? followed->seen.size - followed->taken : 0});
  return states;
}

}  // namespace agreed
