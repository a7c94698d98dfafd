#include "daemon/http/new_token.hpp"

#include <algorithm>
#include <array>
#include <cerrno>
#include <sstream>
#include <system_error>

#include <fcntl.h>
#include <openssl/rand.h>
#include <sys/file.h>
#include <sys/stat.h>
#include <unistd.h>

#include "daemon/descriptor.hpp"
#include "daemon/hex.hpp"
#include "daemon/printable.hpp"

namespace agreed {
namespace {

namespace fs = std::filesystem;

constexpr std::size_t kRandomBytes = 24, kLongestName = 64;
constexpr mode_t kOwnerAlone = 0600;

[[noreturn]] void fail(const char* what, const fs::path& file) {
  throw std::system_error(errno, std::generic_category(), std::string(what) + " " + file.string());
}

struct Opened {
  Descriptor file;
  bool created = false;
};

Opened open_to_append(const fs::path& file) {
  constexpr int flags = O_RDWR | O_APPEND | O_CLOEXEC;
  Opened opened;
  opened.file.reset(::open(file.c_str(), flags | O_CREAT | O_EXCL, kOwnerAlone));
  opened.created = opened.file.valid();
  if (!opened.created && errno == EEXIST) opened.file.reset(::open(file.c_str(), flags));
  if (!opened.file.valid()) fail("the tokens file cannot be opened for writing:", file);
  return opened;
}

std::string read_all(int descriptor, const fs::path& file) {
  std::string text;
  std::array<char, 4096> piece{};
  while (true) {
    const ssize_t count = ::pread(descriptor, piece.data(), piece.size(), static_cast<off_t>(text.size()));
    if (count < 0 && errno == EINTR) continue;
    if (count < 0) fail("the tokens file cannot be read:", file);
    if (count == 0) return text;
    text.append(piece.data(), static_cast<std::size_t>(count));
  }
}

bool write_all(int descriptor, std::string_view text) {
  while (!text.empty()) {
    const ssize_t count = ::write(descriptor, text.data(), text.size());
    if (count < 0 && errno == EINTR) continue;
    if (count < 0) return false;
    text.remove_prefix(static_cast<std::size_t>(count));
  }
  return true;
}

/// A new file lasts only once its folder does.
bool sync_folder(const fs::path& file) {
  const fs::path folder = file.has_parent_path() ? file.parent_path() : ".";
  const Descriptor opened(::open(folder.c_str(), O_RDONLY | O_DIRECTORY | O_CLOEXEC));
  return opened.valid() && ::fsync(opened.get()) == 0;
}

/// Appends, or leaves the lines as they were: half a line would be taken for the beginning of the next.
void append_lasting(const Opened& opened, const fs::path& file, std::size_t size, std::string_view line) {
  const int descriptor = opened.file.get();
  if (write_all(descriptor, line) && ::fsync(descriptor) == 0 && (!opened.created || sync_folder(file)))
    return;
  const int reason = errno;
  if (::ftruncate(descriptor, static_cast<off_t>(size)) == 0) ::fsync(descriptor);
  errno = reason;
  fail("the token could not be stored in", file);
}

}  // namespace

const char* to_string(Role role) {
  return role == Role::operator_ ? "operator" : "reader";
}

std::string make_token() {
  std::array<unsigned char, kRandomBytes> bytes{};
  if (RAND_bytes(bytes.data(), static_cast<int>(bytes.size())) != 1)
    throw std::runtime_error("the system gives no random bytes for a token");
  return "agreed_" + to_hex(bytes);
}

std::vector<std::string> token_names(std::string_view text) {
  std::istringstream lines{std::string(text)};
  std::vector<std::string> names;
  for (std::string line; std::getline(lines, line);) {
    std::istringstream words(line);
    std::string role, name;
    if (words >> role >> name && role.front() != '#') names.push_back(name);
  }
  return names;
}

std::string token_name(const std::string& wanted, Role role, const std::vector<std::string>& taken) {
  const auto is_taken = [&](const std::string& name) {
    return std::find(taken.begin(), taken.end(), name) != taken.end();
  };
  if (wanted.empty()) {
    std::string name = to_string(role);
    for (int number = 2; is_taken(name); ++number)
      name = std::string(to_string(role)) + "-" + std::to_string(number);
    return name;
  }
  if (wanted.size() > kLongestName || wanted.front() == '#' || wanted.find(' ') != std::string::npos ||
      !is_clean_text(wanted))
    throw TokenNameError("'" + printable(wanted) +
                         "' cannot be the name of a token: expected up to 64 bytes without spaces, not"
                         " beginning with #");
  if (is_taken(wanted))
    throw TokenNameError("there is a token named " + wanted +
                         " already; choose another name, or delete its line first to end it");
  return wanted;
}

std::string add_token(const fs::path& file, Role role, const std::string& wanted, std::string_view token) {
  (void)token_name(wanted, role, {});  // a name that cannot be makes no file
  const Opened opened = open_to_append(file);
  if (::flock(opened.file.get(), LOCK_EX) != 0) fail("the tokens file cannot be locked:", file);
  const std::string before = read_all(opened.file.get(), file);
  std::string name = token_name(wanted, role, token_names(before));
  std::string line = before.empty() || before.back() == '\n' ? "" : "\n";
  line.append(to_string(role)).append(" ").append(name).append(" ").append(sha256_hex(token)).append("\n");
  append_lasting(opened, file, before.size(), line);
  return name;
}

}  // namespace agreed
