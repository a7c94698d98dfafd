#include "daemon/journal/durable.hpp"

#include <fcntl.h>
#include <unistd.h>

#include "daemon/journal/journal.hpp"

namespace agreed::journal {

namespace fs = std::filesystem;

fs::path with_suffix(fs::path file, std::string_view suffix) {
  file += suffix;
  return file;
}

void make_lasting(const fs::path& path) {
  const int descriptor = ::open(path.c_str(), O_RDONLY | O_CLOEXEC);
  const bool done = descriptor >= 0 && ::fsync(descriptor) == 0;
  if (descriptor >= 0) ::close(descriptor);
  if (!done) throw JournalError("Cannot write " + path.string() + " to the disk.", true);
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
