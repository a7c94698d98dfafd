#pragma once
// A syntax that rows of the plain format are written in: CSV, JSON lines, one JSON array.
#include <memory>
#include <string>
#include <string_view>
#include <utility>

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

/// A syntax whose records (objects, ...) go to a taker that makes rows of them.
template <class Taker>
class RowsThrough final : public RowFormat {
 public:
  /// `syntax` reads on behalf of the taker it is given.
  template <class MakeSyntax>
  RowsThrough(Taker taker, const MakeSyntax& syntax) : taker_(std::move(taker)), records_(syntax(taker_)) {}

  void feed(std::string_view block) override {
    records_->feed(block);
    unusable_ = records_->unusable();
  }
  void pause() override { records_->pause(); }
  void finish(bool closed) override {
    records_->finish(closed);
    unusable_ = records_->unusable();
  }

 private:
  Taker taker_;
  std::unique_ptr<RowFormat> records_;
};

}  // namespace agreed
