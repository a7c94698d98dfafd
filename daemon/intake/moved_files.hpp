#pragma once
// Files that were moved to done/ and are looked at a little longer, in case their writer was not finished.
#include <string>
#include <vector>

#include "daemon/intake/waiting_files.hpp"

namespace agreed {

class MovedFiles {
 public:
  struct Moved {
    std::string path;      ///< relative to the inbox
    std::string name;      ///< the name it came with
    FileStamp read, seen;  ///< as it was read, as it was seen last
    Tick changed{};        ///< when a change was last seen
    int looks_left = 2;
  };

  void add(const std::string& path, const std::string& name, const FileStamp& read);
  /// It was read again, as `read`.
  void read_again(const std::string& path, const FileStamp& read);
  /// Looks at every file, from the inbox (a descriptor); gives those that are not as they were read.
  [[nodiscard]] std::vector<Moved> look(int inbox, Tick now);

 private:
  std::vector<Moved> files_;
};

}  // namespace agreed
