#pragma once
// The bytes of one file in a drop folder, opened so that nothing outside the folder can be reached.
#include <cstdint>
#include <functional>
#include <optional>
#include <span>
#include <string>
#include <string_view>

#include "daemon/descriptor.hpp"
#include "daemon/intake/pulse.hpp"

namespace agreed {

/// What identifies a state of a file. Equal stamps: nobody wrote in between, as far as the file system tells.
struct FileStamp {
  std::uint64_t device = 0, inode = 0, size = 0;
  std::int64_t mtime_ns = 0;
  std::uint64_t links = 1;  ///< hard links; not compared
  std::int64_t status_ns =
      0;  ///< when it was last written, renamed or its rights changed (ctime); not compared
  bool regular = true, directory = false;

  [[nodiscard]] bool same_content(const FileStamp& other) const {
    return device == other.device && inode == other.inode && size == other.size && mtime_ns == other.mtime_ns;
  }
};

/// The stamp of `name` in the folder, of a symbolic link itself; nothing if it is not there. Throws
/// std::system_error.
[[nodiscard]] std::optional<FileStamp> stamp_of(int folder, const std::string& name);

class FileContent {
 public:
  /// Opens `name` in the folder (a descriptor) for reading: no symbolic link is followed, nothing blocks.
  /// Throws std::system_error; ENOENT and ELOOP tell a vanished file and a link. Look at stamp().regular
  /// before reading. `pulse`, which must outlive the content, steps before each reading.
  FileContent(int folder, const std::string& name, Pulse* pulse = nullptr);

  /// As it is now.
  [[nodiscard]] FileStamp stamp() const;
  /// Reads from `offset`; 0 at the end. Throws std::system_error.
  [[nodiscard]] std::size_t read(std::uint64_t offset, std::span<char> into) const;
  /// Gives the whole content to `take` in blocks of 64 KiB until it returns false; false if it did.
  bool each_block(const std::function<bool(std::string_view)>& take) const;
  /// The last byte that is no white space, of the last KiB; 0 if there is none.
  [[nodiscard]] char last_mark() const;
  /// Also that of UTF-16, either way round.
  [[nodiscard]] bool ends_with_line_end() const;

 private:
  Descriptor file_;
  Pulse* pulse_;
};

}  // namespace agreed
