#include "daemon/intake/inbox.hpp"

#include <algorithm>
#include <array>
#include <cerrno>
#include <cstring>
#include <system_error>

#include <dirent.h>
#include <fcntl.h>
#include <poll.h>
#include <sys/eventfd.h>
#include <sys/inotify.h>
#include <sys/stat.h>

#include "config/unreadable.hpp"
#include "daemon/intake/mount_point.hpp"

namespace agreed {
namespace {

constexpr std::uint32_t kEvents =
    IN_CLOSE_WRITE | IN_MOVED_TO | IN_CREATE | IN_DELETE_SELF | IN_MOVE_SELF | IN_ONLYDIR | IN_EXCL_UNLINK;

std::string words(int error) {
  return std::generic_category().message(error);
}

bool is_symbolic_link(const std::filesystem::path& path) {
  struct stat status {};
  return ::lstat(path.c_str(), &status) == 0 && S_ISLNK(status.st_mode);
}

std::vector<std::string> names_in(int folder) {
  const int copy = ::openat(folder, ".", O_RDONLY | O_DIRECTORY | O_CLOEXEC);
  DIR* const stream = copy < 0 ? nullptr : ::fdopendir(copy);
  if (stream == nullptr) {
    const int error = errno;
    if (copy >= 0) ::close(copy);
    throw std::system_error(error, std::generic_category(), "list");
  }
  std::vector<std::string> names;
  errno = 0;
  while (const dirent* const entry = ::readdir(stream)) {  // NOLINT(concurrency-mt-unsafe): own stream
    const std::string_view name = entry->d_name;
    if (name != "." && name != "..") names.emplace_back(name);
  }
  const int error = errno;
  ::closedir(stream);
  if (error != 0) throw std::system_error(error, std::generic_category(), "list");
  return names;
}

}  // namespace

Inbox::Inbox(std::filesystem::path path, bool changes, std::filesystem::path mount_table)
    // Without a slash at the end, with which a link in its place would be followed.
    : path_(path.has_filename() ? std::move(path) : path.parent_path()),
      mount_table_(std::move(mount_table)),
      changes_(changes),
      wake_(::eventfd(0, EFD_NONBLOCK | EFD_CLOEXEC)),
      notify_(::inotify_init1(IN_NONBLOCK | IN_CLOEXEC)) {
  if (!notify_.valid()) no_events_ = "no inotify: " + words(errno);
  if (!wake_.valid()) throw std::system_error(errno, std::generic_category(), "eventfd");
}

std::string Inbox::open() {
  // A link is followed if the configuration names one, and not if the folder is replaced by one later.
  const int no_link = is_link_.value_or(true) ? 0 : O_NOFOLLOW;
  folder_.reset(::open(path_.c_str(), O_RDONLY | O_DIRECTORY | O_CLOEXEC | no_link));
  struct stat status {};
  if (!folder_.valid() || ::fstat(folder_.get(), &status) != 0) {
    const int error = errno;
    close();
    forget_watch();
    if (no_link != 0 && is_symbolic_link(path_))
      return "a symbolic link has taken the place of the folder; it is not followed";
    return "the folder cannot be opened: " + words(error) +
           (error == EACCES ? " (" + who_may_not(path_) + ")" : "");
  }
  if (!home_ || home_->device != status.st_dev) {
    const Home now{status.st_dev, levels_below_mount(folder_.get())};
    if (std::string why_not = why_not_home(now); !why_not.empty()) {
      close();
      return why_not;
    }
    home_ = now;
  }
  if (!is_link_) is_link_ = is_symbolic_link(path_);
  if (watch_ < 0 || device_ != status.st_dev || inode_ != status.st_ino) {
    forget_watch();
    device_ = status.st_dev;
    inode_ = status.st_ino;
    watch();
  }
  return {};
}

// A device other than before is not enough: a share has another one each time it is mounted.
std::string Inbox::why_not_home(const Home& now) const {
  const bool share_is_gone = home_ && (!home_->levels || !now.levels || *now.levels > *home_->levels);
  const auto missing = share_is_gone ? std::nullopt : missing_mount(folder_.get(), mount_table_);
  if ((!share_is_gone && !missing) || !names_in(folder_.get()).empty()) return {};
  if (share_is_gone) return "the folder is empty and on another device than before; is it mounted?";
  return "the folder is empty and nothing is mounted at " + missing->string() + ", although " +
         mount_table_.string() + " names a file system for it";
}

void Inbox::watch() {
  if (!notify_.valid()) return;
  // By descriptor, so that it is the folder just opened and no other that took its path.
  const std::string self = "/proc/self/fd/" + std::to_string(folder_.get());
  watch_ = ::inotify_add_watch(notify_.get(), self.c_str(), changes_ ? kEvents | IN_MODIFY : kEvents);
  no_events_ = watch_ < 0 ? "no inotify: " + words(errno) : "";
}

void Inbox::forget_watch() {
  if (watch_ >= 0) ::inotify_rm_watch(notify_.get(), watch_);
  watch_ = -1;
}

std::vector<std::string> Inbox::names() const {
  return names_in(folder_.get());
}

InboxEvents Inbox::wait(Tick until) {
  using namespace std::chrono;
  const auto left = ceil<milliseconds>(until - steady_clock::now());
  std::array<pollfd, 2> waiting{{{wake_.get(), POLLIN, 0}, {notify_.get(), POLLIN, 0}}};
  ::poll(waiting.data(), waiting.size(),
         static_cast<int>(std::clamp<std::int64_t>(left.count(), 0, 3'600'000)));
  std::uint64_t count = 0;
  if ((waiting[0].revents & POLLIN) != 0) (void)!::read(wake_.get(), &count, sizeof count);
  InboxEvents events;
  if ((waiting[1].revents & POLLIN) != 0) read_events(events);
  return events;
}

void Inbox::read_events(InboxEvents& events) {
  alignas(inotify_event) std::array<char, std::size_t{64} * 1024> buffer;
  for (;;) {
    const ssize_t size = ::read(notify_.get(), buffer.data(), buffer.size());
    if (size <= 0) return;
    for (const char* at = buffer.data(); at < buffer.data() + size;) {
      inotify_event event{};
      std::memcpy(&event, at, sizeof event);
      const char* const name = at + sizeof event;
      at = name + event.len;
      if ((event.mask & IN_Q_OVERFLOW) != 0) events.lost = true;
      if (event.wd != watch_) continue;  // of a folder no longer watched
      if ((event.mask & (IN_DELETE_SELF | IN_MOVE_SELF | IN_UNMOUNT | IN_IGNORED)) != 0) {
        events.gone = true;
        if ((event.mask & IN_IGNORED) != 0) watch_ = -1;
      }
      if ((event.mask & IN_ISDIR) != 0 || event.len == 0) continue;
      if ((event.mask & IN_CLOSE_WRITE) != 0) events.named.push_back({Notice::closed, name});
      if ((event.mask & IN_MOVED_TO) != 0) events.named.push_back({Notice::renamed_in, name});
      if ((event.mask & IN_MODIFY) != 0) events.named.push_back({Notice::scan, name});
      if ((event.mask & IN_CREATE) != 0) events.named.push_back({Notice::created, name});
    }
  }
}

void Inbox::wake() const {
  const std::uint64_t one = 1;
  (void)!::write(wake_.get(), &one, sizeof one);
}

}  // namespace agreed
