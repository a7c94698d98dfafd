#include "config/unreadable.hpp"

#include <array>
#include <cerrno>
#include <system_error>

#include <fcntl.h>
#include <pwd.h>
#include <sys/stat.h>
#include <unistd.h>

namespace agreed {
namespace {

namespace fs = std::filesystem;

/// "user agreed", or by its number where it has no name.
std::string this_user() {
  std::array<char, 4096> room{};
  passwd entry{};
  passwd* found = nullptr;
  const uid_t user = ::geteuid();
  if (::getpwuid_r(user, &entry, room.data(), room.size(), &found) == 0 && found != nullptr)
    return std::string("user ") + found->pw_name;
  return "user " + std::to_string(user);
}

bool may_search(const fs::path& folder) {
  return ::faccessat(AT_FDCWD, folder.c_str(), X_OK, AT_EACCESS) == 0 || errno != EACCES;
}

std::string words_for(int error, const fs::path& file) {
  switch (error) {
    case ENOENT:
    case ENOTDIR:
      return "there is no file " + file.string();
    case EACCES:
    case EPERM:
      return "permission denied: " + who_may_not(file);
    default:
      return file.string() + " cannot be read: " + std::generic_category().message(error);
  }
}

}  // namespace

std::string who_may_not(const fs::path& path) {
  const fs::path whole = fs::absolute(path).lexically_normal();
  fs::path folder;
  for (const fs::path& name : whole.parent_path()) {
    folder /= name;
    if (!may_search(folder))
      return this_user() + " may not search the folder " + folder.string() + " on the way to " +
             whole.string();
  }
  return this_user() + " may not read " + whole.string();
}

std::string why_unreadable(const fs::path& file) {
  // Opening a pipe would wait for its writer.
  const int descriptor = ::open(file.c_str(), O_RDONLY | O_NONBLOCK | O_NOCTTY | O_CLOEXEC);
  if (descriptor < 0) return words_for(errno, file);
  struct stat status {};
  const bool is_file = ::fstat(descriptor, &status) == 0 && S_ISREG(status.st_mode);
  ::close(descriptor);
  return is_file ? std::string() : file.string() + " is not a file";
}

}  // namespace agreed
