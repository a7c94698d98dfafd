#include "core/pair/window.hpp"

#include <algorithm>
#include <stdexcept>
#include <tuple>

namespace agreed {
namespace {
// Below this part of a sum of squares, what a removal leaves is taken for rounding error.
constexpr double kMostlyGone = 1e-3;

bool is_replicated(const WindowEntry& entry) {
  return entry.x_share < 1 || entry.y_share < 1;
}
}  // namespace

Window::Window(int capacity, std::optional<Duration> age) : capacity_(capacity), age_(age) {
  if (capacity < 1) throw std::invalid_argument("window capacity must be at least 1");
  const auto room = static_cast<std::size_t>(capacity) + 1;
  points_.reserve(room);
  entries_.reserve(room);
}

void Window::insert(Point point, const WindowEntry& entry, int later) {
  const double sxx = moments_.sxx, syy = moments_.syy;
  points_.insert(points_.end() - later, point);
  entries_.insert(entries_.end() - later, entry);
  if (is_replicated(entry)) ++replicated_;
  if (size() > capacity_) {
    const Point oldest = points_.front();
    moments_.replace(oldest, point);
    drop_oldest();
    rebuild_if_mostly_gone(sxx, syy);
  } else {
    moments_.add(point);
  }
  while (age_ && size() > 1 && entries_.front().at < entries_.back().at - *age_) {
    const double sxx_before = moments_.sxx, syy_before = moments_.syy;
    moments_.remove(points_.front());
    drop_oldest();
    rebuild_if_mostly_gone(sxx_before, syy_before);
  }
  if (++number_ % capacity_ == 0) moments_ = Moments(points_);
}

void Window::restart(int n) {
  while (size() > n) drop_oldest();
  number_ = size();
  moments_ = Moments(points_);
}

void Window::drop_oldest() {
  if (is_replicated(entries_.front())) --replicated_;
  points_.erase(points_.begin());
  entries_.erase(entries_.begin());
}

void Window::rebuild_if_mostly_gone(double sxx_before, double syy_before) {
  if (moments_.sxx < kMostlyGone * sxx_before || moments_.syy < kMostlyGone * syy_before)
    moments_ = Moments(points_);
}

Point Window::error_shares() const {
  if (replicated_ == 0) return {1, 1};
  Point sum;
  for (const WindowEntry& entry : entries_) {
    sum.x += entry.x_share;
    sum.y += entry.y_share;
  }
  return {sum.x / size(), sum.y / size()};
}

bool Window::has_equal_shares() const {
  if (replicated_ == 0) return true;
  const WindowEntry& first = entries_.front();
  // Shares are 1 / k of whole numbers, so equal ones are equal to the last bit.
  const auto same = [&](const WindowEntry& entry) {
    return std::tie(entry.x_share, entry.y_share) == std::tie(first.x_share, first.y_share);
  };
  return std::all_of(entries_.begin(), entries_.end(), same);
}

}  // namespace agreed
