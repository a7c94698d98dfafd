// One service per state folder.
#include <array>
#include <cerrno>
#include <system_error>

#include <fcntl.h>
#include <sys/file.h>
#include <unistd.h>

#include "daemon/journal/journal.hpp"

namespace agreed {
namespace {

std::string why(int code) {
  return std::generic_category().message(code);
}

/// The process id the holder wrote, or words if it cannot be read.
std::string holder(int descriptor) {
  std::array<char, 32> text{};
  const ssize_t length = ::pread(descriptor, text.data(), text.size(), 0);
  std::string pid;
  for (ssize_t i = 0; i < length && text.at(static_cast<std::size_t>(i)) >= '0' &&
                      text.at(static_cast<std::size_t>(i)) <= '9';
       ++i)
    pid.push_back(text.at(static_cast<std::size_t>(i)));
  return pid.empty() ? "another process" : "process " + pid;
}

bool write_own_pid(int descriptor) {
  const std::string pid = std::to_string(::getpid()) + "\n";
  return ::ftruncate(descriptor, 0) == 0 &&
         ::pwrite(descriptor, pid.data(), pid.size(), 0) == static_cast<ssize_t>(pid.size());
}

}  // namespace

StateLock::StateLock(const std::filesystem::path& folder) {
  std::error_code failure;
  std::filesystem::create_directories(folder, failure);
  const auto file = folder / "lock";
  descriptor_ = ::open(file.c_str(), O_RDWR | O_CREAT | O_CLOEXEC, 0644);
  if (descriptor_ < 0)
    throw JournalError("Cannot open " + file.string() + ": " + why(errno) +
                           ". The state folder must exist and be writable by the service.",
                       true);
  if (::flock(descriptor_, LOCK_EX | LOCK_NB) == 0) {
    // The pid only helps people; a full disk must not keep the service from starting.
    static_cast<void>(write_own_pid(descriptor_));
    return;
  }
  const int code = errno;
  const std::string other = holder(descriptor_);
  ::close(descriptor_);
  if (code != EWOULDBLOCK) throw JournalError("Cannot lock " + file.string() + ": " + why(code) + ".", true);
  throw JournalError("The state folder " + folder.string() + " is in use by " + other +
                         ". Two services must not share one: stop it first, or name another state folder.",
                     false);
}

// The file stays: removing it would let two processes lock two files of the same name.
StateLock::~StateLock() {
  ::close(descriptor_);
}

}  // namespace agreed
