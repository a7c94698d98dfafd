#include "daemon/cli/progress.hpp"

#include <algorithm>
#include <cstdio>
#include <utility>

#include <fmt/format.h>
#include <unistd.h>

namespace agreed {
namespace {
constexpr std::chrono::milliseconds kBetweenDrawings{100};
constexpr int kBarWidth = 40;
}  // namespace

Progress::Progress(std::string what) : what_(std::move(what)), on_terminal_(::isatty(STDERR_FILENO) == 1) {}

void Progress::show(double share) {
  if (!on_terminal_) return;
  const auto now = std::chrono::steady_clock::now();
  if (now < next_) return;
  next_ = now + kBetweenDrawings;
  const double within = std::clamp(share, 0.0, 1.0);
  const auto filled = static_cast<std::size_t>(within * kBarWidth);
  fmt::print(stderr, "\r{} [{}{}] {:3.0f} %", what_, std::string(filled, '#'),
             std::string(kBarWidth - filled, '.'), 100 * within);
  std::fflush(stderr);
  drawn_ = true;
}

void Progress::clear() {
  if (!drawn_) return;
  fmt::print(stderr, "\r\033[K");
  std::fflush(stderr);
  drawn_ = false;
}

}  // namespace agreed
