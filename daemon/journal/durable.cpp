#include "daemon/journal/durable.hpp"

#include <cerrno>
#include <cstdio>
#include <system_error>

#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include "daemon/journal/journal.hpp"

namespace agreed::journal {

namespace fs = std::filesystem;

fs::path with_suffix(fs::path file, std::string_view suffix) {
  file += suffix;
  return file;
}

void make_empty(const fs::path& file, const fs::path& like) {
  constexpr mode_t may_read_and_write = 0666, owner = 0600;
  const auto failed = [](const char* what, const fs::path& path) {
    return fs::filesystem_error(what, path, std::error_code(errno, std::generic_category()));
  };
  struct stat status {};
  if (::stat(like.c_str(), &status) != 0) throw failed("look at", like);
  const mode_t mode = (status.st_mode & may_read_and_write) | owner;
  const int descriptor = ::open(file.c_str(), O_WRONLY | O_CREAT | O_EXCL | O_CLOEXEC, mode);
  if (descriptor < 0) throw failed("create", file);
  ::close(descriptor);
}

void make_lasting(const fs::path& path) {
  const int descriptor = ::open(path.c_str(), O_RDONLY | O_CLOEXEC);
  const bool done = descriptor >= 0 && ::fsync(descriptor) == 0;
  if (descriptor >= 0) ::close(descriptor);
  if (!done) throw JournalError("Cannot write " + path.string() + " to the disk.", true);
}

void rename_to_free(const fs::path& from, const fs::path& to) {
  if (::renameat2(AT_FDCWD, from.c_str(), AT_FDCWD, to.c_str(), RENAME_NOREPLACE) == 0) return;
  // Where the file system cannot rename so, looking first has to do.
  const bool cannot = errno == EINVAL || errno == ENOSYS;
  if (errno == EEXIST || (cannot && fs::exists(to)))
    throw JournalError(to.string() + " came to be meanwhile and is not overwritten. Name another file.",
                       false);
  if (!cannot)
    throw fs::filesystem_error("rename", from, to, std::error_code(errno, std::generic_category()));
  fs::rename(from, to);
}

void remove_unfinished(const fs::path& database) {
  for (const char* suffix : {"", "-journal", "-wal", "-shm"}) fs::remove(with_suffix(database, suffix));
}

fs::path free_name(const fs::path& stem, std::string_view ending) {
  fs::path name = with_suffix(stem, ending);
  for (int i = 1; fs::exists(name); ++i)
    name = with_suffix(with_suffix(with_suffix(stem, "."), std::to_string(i)), ending);
  return name;
}

}  // namespace agreed::journal
