#include "daemon/intake/mount_point.hpp"

#include <algorithm>
#include <array>
#include <cstdio>
#include <iterator>
#include <memory>
#include <string>
#include <system_error>

#include <fcntl.h>
#include <mntent.h>
#include <sys/stat.h>

#include "daemon/descriptor.hpp"

namespace agreed {
namespace {

namespace fs = std::filesystem;

constexpr int kDeepest = 1000;

bool is_or_holds(const fs::path& above, const fs::path& path) {
  return std::mismatch(above.begin(), above.end(), path.begin(), path.end()).first == above.end();
}

/// A file system of its own comes to this place: neither swap nor a folder that is elsewhere as well.
bool brings_a_file_system(const mntent& entry) {
  return entry.mnt_dir[0] == '/' && hasmntopt(&entry, "bind") == nullptr &&
         hasmntopt(&entry, "rbind") == nullptr;
}

/// The deepest mount point of the table at `path` or above it, but not the root.
std::optional<fs::path> mount_point_of(const fs::path& path, const fs::path& table) {
  const std::unique_ptr<FILE, int (*)(FILE*)> file(::setmntent(table.c_str(), "r"), &::endmntent);
  if (!file) return std::nullopt;
  std::optional<fs::path> deepest;
  std::array<char, 8192> room{};
  mntent entry{};
  while (::getmntent_r(file.get(), &entry, room.data(), static_cast<int>(room.size())) != nullptr) {
    if (!brings_a_file_system(entry)) continue;
    fs::path point = fs::path(entry.mnt_dir).lexically_normal();
    if (!point.has_filename()) point = point.parent_path();  // without the slash at its end
    if (point == point.root_path() || !is_or_holds(point, path)) continue;
    if (!deepest || is_or_holds(*deepest, point)) deepest = std::move(point);
  }
  return deepest;
}

}  // namespace

std::optional<int> levels_below_mount(int folder) {
  struct stat here {};
  Descriptor at(::openat(folder, ".", O_PATH | O_DIRECTORY | O_CLOEXEC));
  if (!at.valid() || ::fstat(at.get(), &here) != 0) return std::nullopt;
  for (int levels = 0; levels < kDeepest; ++levels) {
    struct stat above {};
    Descriptor parent(::openat(at.get(), "..", O_PATH | O_DIRECTORY | O_CLOEXEC));
    if (!parent.valid() || ::fstat(parent.get(), &above) != 0) return std::nullopt;
    const bool is_root = above.st_dev == here.st_dev && above.st_ino == here.st_ino;
    if (is_root || above.st_dev != here.st_dev) return levels;
    at = std::move(parent);
    here = above;
  }
  return std::nullopt;
}

std::optional<fs::path> missing_mount(int folder, const fs::path& table) {
  std::error_code failure;
  const fs::path path = fs::read_symlink("/proc/self/fd/" + std::to_string(folder), failure);
  if (failure) return std::nullopt;
  auto point = mount_point_of(path, table);
  const auto levels = point ? levels_below_mount(folder) : std::nullopt;
  if (!levels) return std::nullopt;
  const auto between = std::distance(path.begin(), path.end()) - std::distance(point->begin(), point->end());
  if (*levels <= between) return std::nullopt;
  return point;
}

}  // namespace agreed
