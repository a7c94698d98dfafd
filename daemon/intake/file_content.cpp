#include "daemon/intake/file_content.hpp"

#include <array>
#include <cerrno>
#include <system_error>
#include <vector>

#include <fcntl.h>
#include <sys/stat.h>

namespace agreed {
namespace {

constexpr std::size_t kBlock = std::size_t{64} * 1024;

[[noreturn]] void fail(const char* what) {
  throw std::system_error(errno, std::generic_category(), what);
}

FileStamp stamp_from(const struct stat& status) {
  FileStamp stamp;
  stamp.device = status.st_dev;
  stamp.inode = status.st_ino;
  stamp.size = static_cast<std::uint64_t>(status.st_size);
  stamp.mtime_ns = std::int64_t{status.st_mtim.tv_sec} * 1'000'000'000 + status.st_mtim.tv_nsec;
  stamp.status_ns = std::int64_t{status.st_ctim.tv_sec} * 1'000'000'000 + status.st_ctim.tv_nsec;
  stamp.links = status.st_nlink;
  stamp.regular = S_ISREG(status.st_mode);
  stamp.directory = S_ISDIR(status.st_mode);
  return stamp;
}

}  // namespace

std::optional<FileStamp> stamp_of(int folder, const std::string& name) {
  struct stat status {};
  if (::fstatat(folder, name.c_str(), &status, AT_SYMLINK_NOFOLLOW) == 0) return stamp_from(status);
  if (errno == ENOENT) return std::nullopt;
  fail("stat");
}

FileContent::FileContent(int folder, const std::string& name, Pulse* pulse)
    : file_(::openat(folder, name.c_str(), O_RDONLY | O_NOFOLLOW | O_NONBLOCK | O_CLOEXEC)), pulse_(pulse) {
  if (!file_.valid()) fail("open");
}

FileStamp FileContent::stamp() const {
  struct stat status {};
  if (::fstat(file_.get(), &status) != 0) fail("stat");
  return stamp_from(status);
}

std::size_t FileContent::read(std::uint64_t offset, std::span<char> into) const {
  if (pulse_ != nullptr) pulse_->step();
  for (;;) {
    const ssize_t got = ::pread(file_.get(), into.data(), into.size(), static_cast<off_t>(offset));
    if (got >= 0) return static_cast<std::size_t>(got);
    if (errno != EINTR) fail("read");
  }
}

bool FileContent::each_block(const std::function<bool(std::string_view)>& take) const {
  std::vector<char> block(kBlock);
  for (std::uint64_t offset = 0;;) {
    const std::size_t got = read(offset, block);
    if (got == 0) return true;
    if (!take({block.data(), got})) return false;
    offset += got;
  }
}

char FileContent::last_mark() const {
  std::array<char, 1024> end{};
  const std::uint64_t size = stamp().size;
  const std::uint64_t first = size < end.size() ? 0 : size - end.size();
  const std::string_view text(end.data(), read(first, end));
  const std::size_t found = text.find_last_not_of(" \t\r\n");
  return found == std::string_view::npos ? '\0' : text[found];
}

bool FileContent::ends_with_line_end() const {
  const std::uint64_t size = stamp().size;
  if (size == 0) return false;
  std::array<char, 2> end{};
  const std::uint64_t from = size < end.size() ? 0 : size - end.size();
  const std::string_view text(end.data(), read(from, end));
  return text.ends_with('\n') || text == std::string_view("\n\0", 2);
}

}  // namespace agreed
