// A library to preload into the real executable: counts the calls that reach the files below one folder, and
// makes the n-th of them fail, or kills the process just before it. The test steers it through a small shared
// file. Nothing of this is in the executable itself.
//
// AGREED_FAULTS names the shared file, AGREED_FAULTS_BELOW the folder. A process that is killed leaves to the
// kernel whatever it had asked for until then; so being killed before each call that changes something is
// being killed at every instruction there is.
#include <array>
#include <atomic>
#include <bit>
#include <cerrno>
#include <csignal>
#include <cstdarg>
#include <cstdint>
#include <cstdio>
#include <cstdlib>
#include <cstring>
#include <string>
#include <string_view>

#include <dlfcn.h>
#include <fcntl.h>
#include <sys/mman.h>
#include <sys/socket.h>
#include <sys/stat.h>
#include <sys/types.h>
#include <unistd.h>

namespace {

enum Kind : std::uint32_t {
  kWrite = 1,    ///< write, pwrite, ftruncate
  kSync = 2,     ///< fsync, fdatasync
  kRename = 4,   ///< rename, link
  kOpen = 8,     ///< open of what is there
  kCreate = 16,  ///< open that may create
  kFolder = 32,  ///< mkdir, rmdir
  kUnlink = 64,
  kRead = 128,
  kSend = 256,  ///< send, on any socket
};

enum Action : std::uint32_t { kCount = 0, kFailOnce = 1, kFailFromThereOn = 2, kKill = 3 };

/// Laid out as tests/e2e/faults.py writes it.
struct Control {
  std::atomic<std::uint32_t> armed;
  std::uint32_t kinds;
  std::uint32_t action;
  std::uint32_t target;  ///< the call that is hit, from 1
  std::int32_t error;    ///< errno of a call that fails
  std::atomic<std::uint32_t> count;
  std::atomic<std::uint32_t> hits;
  std::array<std::atomic<std::uint32_t>, 9> by_kind;  ///< all calls, by the bit of their kind
  std::array<char, 192> last;                         ///< the call that was hit first, and its file
};
static_assert(sizeof(Control) == 256);

template <class Function>
Function* next(const char* name) {
  return reinterpret_cast<Function*>(::dlsym(RTLD_NEXT, name));
}

Control* map_control() {
  const char* const file = std::getenv("AGREED_FAULTS");
  if (file == nullptr) return nullptr;
  static const auto kRealOpen = next<int(const char*, int, ...)>("open");
  const int descriptor = kRealOpen(file, O_RDWR | O_CLOEXEC);
  if (descriptor < 0) return nullptr;
  void* const memory = ::mmap(nullptr, sizeof(Control), PROT_READ | PROT_WRITE, MAP_SHARED, descriptor, 0);
  ::close(descriptor);
  return memory == MAP_FAILED ? nullptr : static_cast<Control*>(memory);
}

Control* control() {
  static Control* const kControl = map_control();
  return kControl;
}

bool armed() {
  return control() != nullptr && control()->armed.load() != 0;
}

bool is_below(std::string_view path) {
  static const char* const kFolder_ = std::getenv("AGREED_FAULTS_BELOW");
  return kFolder_ != nullptr && path.starts_with(kFolder_);
}

std::string path_of(int descriptor) {
  std::array<char, 4096> path{};
  const std::string link = "/proc/self/fd/" + std::to_string(descriptor);
  const ssize_t length = ::readlink(link.c_str(), path.data(), path.size());
  return length > 0 ? std::string(path.data(), static_cast<std::size_t>(length)) : std::string();
}

std::string path_at(int folder, const char* name) {
  if (name[0] == '/' || folder == AT_FDCWD) return name;
  return path_of(folder) + "/" + name;
}

/// Whether this call has to fail; errno is set then.
bool hit(Kind kind, const char* call, std::string_view path) {
  Control& c = *control();
  ++c.by_kind.at(static_cast<std::size_t>(std::countr_zero(static_cast<std::uint32_t>(kind))));
  if ((c.kinds & kind) == 0) return false;
  const std::uint32_t number = ++c.count;
  if (c.action == kCount || number < c.target) return false;
  if (c.action != kFailFromThereOn && number != c.target) return false;
  if (c.hits++ == 0)
    std::snprintf(c.last.data(), c.last.size(), "%s %.*s", call, static_cast<int>(path.size()), path.data());
  if (c.action == kKill) {
    ::kill(::getpid(), SIGKILL);
    for (;;) ::pause();
  }
  errno = c.error;
  return true;
}

bool fails(Kind kind, const char* call, const std::string& path) {
  return is_below(path) && hit(kind, call, path);
}

bool fails(Kind kind, const char* call, int descriptor) {
  return armed() && fails(kind, call, path_of(descriptor));
}

bool fails_at(Kind kind, const char* call, int folder, const char* name) {
  return armed() && fails(kind, call, path_at(folder, name));
}

Kind kind_of_open(int flags) {
  return (flags & O_CREAT) != 0 ? kCreate : kOpen;
}

mode_t mode_of(int flags, va_list arguments) {
  return (flags & (O_CREAT | O_TMPFILE)) != 0 ? static_cast<mode_t>(va_arg(arguments, unsigned)) : 0;
}

}  // namespace

extern "C" {

int open(const char* path, int flags, ...) {
  va_list arguments;
  va_start(arguments, flags);
  const mode_t mode = mode_of(flags, arguments);
  va_end(arguments);
  if (fails_at(kind_of_open(flags), "open", AT_FDCWD, path)) return -1;
  static const auto kReal = next<int(const char*, int, ...)>("open");
  return kReal(path, flags, mode);
}

int open64(const char* path, int flags, ...) {
  va_list arguments;
  va_start(arguments, flags);
  const mode_t mode = mode_of(flags, arguments);
  va_end(arguments);
  if (fails_at(kind_of_open(flags), "open", AT_FDCWD, path)) return -1;
  static const auto kReal = next<int(const char*, int, ...)>("open64");
  return kReal(path, flags, mode);
}

int openat(int folder, const char* path, int flags, ...) {
  va_list arguments;
  va_start(arguments, flags);
  const mode_t mode = mode_of(flags, arguments);
  va_end(arguments);
  if (fails_at(kind_of_open(flags), "openat", folder, path)) return -1;
  static const auto kReal = next<int(int, const char*, int, ...)>("openat");
  return kReal(folder, path, flags, mode);
}

ssize_t read(int descriptor, void* bytes, size_t size) {
  if (fails(kRead, "read", descriptor)) return -1;
  static const auto kReal = next<ssize_t(int, void*, size_t)>("read");
  return kReal(descriptor, bytes, size);
}

ssize_t pread(int descriptor, void* bytes, size_t size, off_t offset) {
  if (fails(kRead, "pread", descriptor)) return -1;
  static const auto kReal = next<ssize_t(int, void*, size_t, off_t)>("pread");
  return kReal(descriptor, bytes, size, offset);
}

ssize_t pread64(int descriptor, void* bytes, size_t size, off64_t offset) {
  if (fails(kRead, "pread", descriptor)) return -1;
  static const auto kReal = next<ssize_t(int, void*, size_t, off64_t)>("pread64");
  return kReal(descriptor, bytes, size, offset);
}

ssize_t write(int descriptor, const void* bytes, size_t size) {
  if (fails(kWrite, "write", descriptor)) return -1;
  static const auto kReal = next<ssize_t(int, const void*, size_t)>("write");
  return kReal(descriptor, bytes, size);
}

ssize_t pwrite64(int descriptor, const void* bytes, size_t size, off64_t offset) {
  if (fails(kWrite, "pwrite", descriptor)) return -1;
  static const auto kReal = next<ssize_t(int, const void*, size_t, off64_t)>("pwrite64");
  return kReal(descriptor, bytes, size, offset);
}

int ftruncate64(int descriptor, off64_t size) noexcept {
  if (fails(kWrite, "ftruncate", descriptor)) return -1;
  static const auto kReal = next<int(int, off64_t)>("ftruncate64");
  return kReal(descriptor, size);
}

int fsync(int descriptor) {
  if (fails(kSync, "fsync", descriptor)) return -1;
  static const auto kReal = next<int(int)>("fsync");
  return kReal(descriptor);
}

int fdatasync(int descriptor) {
  if (fails(kSync, "fdatasync", descriptor)) return -1;
  static const auto kReal = next<int(int)>("fdatasync");
  return kReal(descriptor);
}

int rename(const char* from, const char* to) noexcept {
  if (fails_at(kRename, "rename", AT_FDCWD, from)) return -1;
  static const auto kReal = next<int(const char*, const char*)>("rename");
  return kReal(from, to);
}

int renameat(int from_folder, const char* from, int to_folder, const char* to) noexcept {
  if (fails_at(kRename, "renameat", from_folder, from)) return -1;
  static const auto kReal = next<int(int, const char*, int, const char*)>("renameat");
  return kReal(from_folder, from, to_folder, to);
}

int renameat2(int from_folder, const char* from, int to_folder, const char* to, unsigned flags) noexcept {
  if (fails_at(kRename, "renameat2", from_folder, from)) return -1;
  static const auto kReal = next<int(int, const char*, int, const char*, unsigned)>("renameat2");
  return kReal(from_folder, from, to_folder, to, flags);
}

int mkdir(const char* path, mode_t mode) noexcept {
  if (fails_at(kFolder, "mkdir", AT_FDCWD, path)) return -1;
  static const auto kReal = next<int(const char*, mode_t)>("mkdir");
  return kReal(path, mode);
}

int mkdirat(int folder, const char* path, mode_t mode) noexcept {
  if (fails_at(kFolder, "mkdirat", folder, path)) return -1;
  static const auto kReal = next<int(int, const char*, mode_t)>("mkdirat");
  return kReal(folder, path, mode);
}

int unlink(const char* path) noexcept {
  if (fails_at(kUnlink, "unlink", AT_FDCWD, path)) return -1;
  static const auto kReal = next<int(const char*)>("unlink");
  return kReal(path);
}

int unlinkat(int folder, const char* path, int flags) noexcept {
  if (fails_at(kUnlink, "unlinkat", folder, path)) return -1;
  static const auto kReal = next<int(int, const char*, int)>("unlinkat");
  return kReal(folder, path, flags);
}

int remove(const char* path) noexcept {
  if (fails_at(kUnlink, "remove", AT_FDCWD, path)) return -1;
  static const auto kReal = next<int(const char*)>("remove");
  return kReal(path);
}

ssize_t send(int socket, const void* bytes, size_t size, int flags) {
  if (armed() && hit(kSend, "send", "")) return -1;
  static const auto kReal = next<ssize_t(int, const void*, size_t, int)>("send");
  return kReal(socket, bytes, size, flags);
}

}  // extern "C"
