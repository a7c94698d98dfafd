#pragma once
// How far a command is, on a terminal's standard error output only.
#include <chrono>
#include <string>

namespace agreed {

class Progress {
 public:
  /// `what` is done, in a few words. Silent if the standard error output is no terminal.
  explicit Progress(std::string what);
  ~Progress() { clear(); }
  Progress(const Progress&) = delete;
  Progress& operator=(const Progress&) = delete;

  /// `share` from 0 to 1; drawn at most ten times a second.
  void show(double share);
  /// Takes the line away again.
  void clear();

 private:
  std::string what_;
  bool on_terminal_ = false, drawn_ = false;
  std::chrono::steady_clock::time_point next_{};
};

}  // namespace agreed
