#pragma once
// A syntax that rows of the plain format are written in: CSV, JSON lines, one JSON array.
#include <string>
#include <string_view>

namespace agreed {

class RowFormat {
 public:
  virtual ~RowFormat() = default;
  /// Takes the next bytes, cut anywhere. Nothing more happens once `unusable` says something.
  virtual void feed(std::string_view block) = 0;
  /// The file ends here for now, after a line end, and may be fed more later: what was held back, because
  /// more might have made it complete, is given out.
  virtual void pause() {}
  /// The end of the file. `closed`: its writer is known to have finished, so a last line without line end
  /// counts; else it is a bad row.
  virtual void finish(bool closed) = 0;
  /// Why the file as a whole cannot be read; empty while it can. Never set once a row was given out.
  [[nodiscard]] const std::string& unusable() const { return unusable_; }

 protected:
  std::string unusable_;
};

}  // namespace agreed
