#include "daemon/intake/waiting_files.hpp"

#include <algorithm>
#include <tuple>

namespace agreed {

Tick WaitingFiles::settled_at(const WaitingFile& file) const {
  if (file.stamp.regular && file.stamp.size == 0) return file.changed + unfinished_;
  switch (file.notice) {
    case Notice::closed:
    case Notice::renamed_in:
      return file.changed;
    case Notice::created:
      return file.changed + unfinished_;
    case Notice::scan:
      break;
  }
  return file.changed + settle_;
}

void WaitingFiles::see(const std::string& name, const FileStamp& stamp, Notice notice, Tick now) {
  if (stamp.directory) return forget_unless_due(name);
  auto [at, is_new] = files_.try_emplace(name);
  WaitingFile& file = at->second;
  file.scan = scan_;
  if (file.due) return;  // it is looked at again when its answer has come
  const bool has_changed = is_new || !file.stamp.same_content(stamp);
  if (has_changed) file.first = is_new && notice == Notice::scan && stamp.regular && stamp.size > 0;
  const bool try_again = std::exchange(file.retry, false);
  if (notice == Notice::scan) {
    if (try_again) return plan(name, file, now);
    if (!has_changed) return;
    if (file.finished()) file.notice = Notice::created;  // somebody opened it again
  } else {
    // A hard link appears without ever being closed; only standing still can tell that it is complete.
    file.notice = notice == Notice::created && stamp.links > 1 ? Notice::scan : notice;
  }
  file.stamp = stamp;
  file.changed = now;
  plan(name, file, settled_at(file));
}

void WaitingFiles::forget(const std::string& name) {
  const auto at = files_.find(name);
  if (at == files_.end()) return;
  unplan(name, at->second);
  files_.erase(at);
}

void WaitingFiles::forget_unless_due(const std::string& name) {
  const auto at = files_.find(name);
  if (at != files_.end() && !at->second.due) forget(name);
}

void WaitingFiles::end_scan() {
  std::vector<std::string> gone;
  for (const auto& [name, file] : files_)
    if (file.scan != scan_ && !file.due) gone.push_back(name);
  for (const std::string& name : gone) forget(name);
}

void WaitingFiles::events_lost(Tick now) {
  for (auto& [name, file] : files_) {
    if (file.due || file.notice != Notice::created) continue;
    file.notice = Notice::scan;
    file.changed = now;
    plan(name, file, settled_at(file));
  }
}

// The oldest file that newer ones have to wait for.
std::optional<WaitingFiles::Barrier> WaitingFiles::barrier(Tick now) const {
  std::optional<Barrier> oldest;
  for (const auto& [name, file] : files_) {
    if (!file.first || file.due || (!file.retry && file.due_at <= now)) continue;
    if (oldest && std::tie(oldest->place.first, oldest->place.second) < std::tie(file.stamp.mtime_ns, name))
      continue;
    oldest = Barrier{{file.stamp.mtime_ns, name}, file.retry ? std::nullopt : std::optional(file.due_at)};
  }
  return oldest;
}

std::vector<std::pair<std::string, WaitingFile>> WaitingFiles::take_due(Tick now) {
  std::vector<std::pair<std::string, WaitingFile>> due;
  if (plan_.empty() || plan_.begin()->first > now) return due;
  const auto hold = barrier(now);
  while (!plan_.empty() && plan_.begin()->first <= now) {
    const std::string name = plan_.begin()->second;
    plan_.erase(plan_.begin());
    WaitingFile& file = files_.at(name);
    if (hold && hold->place < Place{file.stamp.mtime_ns, name}) {
      if (hold->until)
        plan(name, file, *hold->until);
      else
        file.retry = true;
      continue;
    }
    file.due = true;
    file.retry = false;
    due.emplace_back(name, file);
  }
  std::sort(due.begin(), due.end(), [](const auto& a, const auto& b) {
    return std::tie(a.second.stamp.mtime_ns, a.first) < std::tie(b.second.stamp.mtime_ns, b.first);
  });
  return due;
}

void WaitingFiles::changed(const std::string& name, const FileStamp& stamp, Tick now) {
  WaitingFile& file = files_.at(name);
  file.stamp = stamp;
  file.changed = now;
  file.due = false;
  file.first = false;
  // A change after the close: its writer is at work again.
  if (file.finished()) file.notice = Notice::created;
  plan(name, file, settled_at(file));
}

bool WaitingFiles::wait_unfinished(const std::string& name, Tick now) {
  WaitingFile& file = files_.at(name);
  const Tick until = file.changed + unfinished_;
  if (now >= until) return false;
  file.due = false;
  file.first = false;
  plan(name, file, until);
  return true;
}

void WaitingFiles::retry_at_scan(const std::string& name, bool in_order) {
  WaitingFile& file = files_.at(name);
  unplan(name, file);
  file.due = false;
  file.retry = true;
  file.first = in_order;
}

std::optional<Tick> WaitingFiles::next_due() const {
  if (plan_.empty()) return std::nullopt;
  return plan_.begin()->first;
}

void WaitingFiles::plan(const std::string& name, WaitingFile& file, Tick due_at) {
  unplan(name, file);
  file.due_at = due_at;
  plan_.emplace(due_at, name);
}

void WaitingFiles::unplan(const std::string& name, const WaitingFile& file) {
  plan_.erase({file.due_at, name});
}

}  // namespace agreed
