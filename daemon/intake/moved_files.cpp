#include "daemon/intake/moved_files.hpp"

#include <algorithm>
#include <system_error>

namespace agreed {
namespace {

constexpr int kLooks = 2;

std::optional<FileStamp> look_at(int inbox, const MovedFiles::Moved& file) {
  try {
    return stamp_of(inbox, file.path);
  } catch (const std::system_error&) {
    // The folder cannot be read now; it counts as a look, or it would be looked at for ever.
    return file.read;
  }
}

}  // namespace

void MovedFiles::add(const std::string& path, const std::string& name, const FileStamp& read) {
  files_.push_back({path, name, read, read, {}, kLooks});
}

void MovedFiles::read_again(const std::string& path, const FileStamp& read) {
  for (Moved& file : files_) {
    if (file.path != path) continue;
    file.read = read;
    file.looks_left = kLooks;
  }
}

std::vector<MovedFiles::Moved> MovedFiles::look(int inbox, Tick now) {
  std::vector<Moved> grown;
  std::vector<Moved> kept;
  for (Moved& file : files_) {
    const std::optional<FileStamp> stamp = look_at(inbox, file);
    if (!stamp || !stamp->regular) continue;
    if (!stamp->same_content(file.seen)) file.changed = now;
    file.seen = *stamp;
    if (stamp->same_content(file.read))
      --file.looks_left;
    else
      grown.push_back(file);
    if (file.looks_left > 0) kept.push_back(std::move(file));
  }
  files_ = std::move(kept);
  return grown;
}

}  // namespace agreed
