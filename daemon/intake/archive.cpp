#include "daemon/intake/archive.hpp"

#include <algorithm>
#include <cerrno>
#include <cstdint>
#include <cstdio>
#include <string_view>
#include <system_error>

#include <fcntl.h>
#include <sys/stat.h>

#include "core/base/rfc3339.hpp"
#include "daemon/descriptor.hpp"

namespace agreed {
namespace {

constexpr std::size_t kLongestName = 255;
constexpr std::size_t kLongestEnding = 10;

[[noreturn]] void fail(const char* what, int error) {
  throw std::system_error(error, std::generic_category(), what);
}

/// Opens a folder in a folder, made if need be; a symbolic link in its place is refused.
Descriptor subfolder(int parent, const std::string& name) {
  if (::mkdirat(parent, name.c_str(), 0777) != 0 && errno != EEXIST) fail("make folder", errno);
  Descriptor folder(::openat(parent, name.c_str(), O_RDONLY | O_DIRECTORY | O_NOFOLLOW | O_CLOEXEC));
  if (!folder.valid()) fail("open folder", errno);
  return folder;
}

/// "results.csv" with number 3 is "results.3.csv"; number 1 changes nothing. Cut so that `more` fits behind
/// it.
std::string numbered(const std::string& name, std::uint32_t number, std::string_view more = {}) {
  std::string number_text;
  if (number > 1) number_text.append(".").append(std::to_string(number));
  const std::size_t dot = name.rfind('.');
  const bool has_ending = dot != std::string::npos && dot > 0 && name.size() - dot <= kLongestEnding;
  const std::string ending = has_ending ? name.substr(dot) : std::string();
  const std::size_t room = kLongestName - number_text.size() - ending.size() - more.size();
  return name.substr(0, std::min(room, name.size() - ending.size()))
      .append(number_text)
      .append(ending)
      .append(more);
}

bool exists(int folder, const std::string& name) {
  struct stat status {};
  return ::fstatat(folder, name.c_str(), &status, AT_SYMLINK_NOFOLLOW) == 0;
}

/// A number from which names are probably free: found by halving, since one name may come thousands of times.
std::uint32_t first_free(int folder, const std::string& name) {
  const auto taken = [&](std::uint32_t number) { return exists(folder, numbered(name, number)); };
  if (!taken(1)) return 1;
  std::uint32_t upper = 2;
  while (taken(upper)) upper *= 2;
  std::uint32_t lower = upper / 2;
  while (upper - lower > 1) {
    const std::uint32_t middle = lower + (upper - lower) / 2;
    (taken(middle) ? lower : upper) = middle;
  }
  return upper;
}

/// False if the new name is taken.
bool rename_free(int from, const std::string& name, int to, const std::string& new_name) {
  if (::renameat2(from, name.c_str(), to, new_name.c_str(), RENAME_NOREPLACE) == 0) return true;
  if (errno == EEXIST) return false;
  if (errno != EINVAL && errno != ENOSYS) fail("move", errno);
  // The file system cannot rename so; nobody but us writes to this folder, so looking first is enough.
  if (exists(to, new_name)) return false;
  if (::renameat(from, name.c_str(), to, new_name.c_str()) != 0) fail("move", errno);
  return true;
}

/// Whether the file holds `text`, or only its beginning: what a crash left of writing it.
bool is_begun(int folder, const std::string& name, const std::string& text) {
  const Descriptor file(::openat(folder, name.c_str(), O_RDONLY | O_NOFOLLOW | O_NONBLOCK | O_CLOEXEC));
  std::string found(text.size() + 1, '\0');
  std::size_t length = 0;
  for (ssize_t more = 1; more > 0 && length < found.size(); length += static_cast<std::size_t>(more)) {
    more = file.valid() ? ::read(file.get(), found.data() + length, found.size() - length) : -1;
    if (more < 0) return false;
  }
  return length <= text.size() && text.starts_with(std::string_view(found).substr(0, length));
}

/// False if the name is taken by another text.
bool write_new(int folder, const std::string& name, const std::string& text) {
  Descriptor file(::openat(folder, name.c_str(), O_WRONLY | O_CREAT | O_EXCL | O_NOFOLLOW | O_CLOEXEC, 0666));
  if (!file.valid() && errno == EEXIST) {
    if (!is_begun(folder, name, text)) return false;
    file.reset(::openat(folder, name.c_str(), O_WRONLY | O_TRUNC | O_NOFOLLOW | O_CLOEXEC));
  }
  if (!file.valid()) fail("write reason", errno);
  for (std::size_t done = 0; done < text.size();) {
    const ssize_t wrote = ::write(file.get(), text.data() + done, text.size() - done);
    if (wrote < 0 && errno == EINTR) continue;
    if (wrote < 0) {
      const int error = errno;
      ::unlinkat(folder, name.c_str(), 0);  // the half reason just begun
      fail("write reason", error);
    }
    done += static_cast<std::size_t>(wrote);
  }
  return true;
}

}  // namespace

Archived move_to_done(int inbox, const std::string& name, Instant committed_at) {
  const std::string day = to_rfc3339(committed_at).substr(0, 10);
  const Descriptor done = subfolder(inbox, "done");
  const Descriptor folder = subfolder(done.get(), day);
  for (std::uint32_t number = first_free(folder.get(), name);; ++number) {
    const std::string new_name = numbered(name, number);
    if (rename_free(inbox, name, folder.get(), new_name)) return {"done/" + day, new_name};
  }
}

Archived move_to_rejected(int inbox, const std::string& name, const std::string& reason) {
  const Descriptor folder = subfolder(inbox, "rejected");
  for (std::uint32_t number = first_free(folder.get(), name);; ++number) {
    const std::string new_name = numbered(name, number);
    const std::string reason_name = numbered(name, number, ".reason.txt");
    // The reason first: a crash in between leaves a reason too many and not one too few.
    if (!write_new(folder.get(), reason_name, reason + "\n")) continue;
    try {
      if (rename_free(inbox, name, folder.get(), new_name)) return {"rejected", new_name};
    } catch (...) {
      ::unlinkat(folder.get(), reason_name.c_str(), 0);
      throw;
    }
    ::unlinkat(folder.get(), reason_name.c_str(), 0);  // just written for a name that is taken
  }
}

}  // namespace agreed
