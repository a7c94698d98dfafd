#pragma once
// An array that grows at the back and is cut at the front, contiguous at all times: the loops over split
// points run over plain memory.
#include <cstddef>
#include <span>
#include <vector>

namespace agreed {

template <class T>
class SlidingArray {
 public:
  void push_back(const T& item) {
    if (begin_ > 0 && 2 * begin_ >= items_.size() && items_.size() == items_.capacity()) {
      items_.erase(items_.begin(), items_.begin() + static_cast<std::ptrdiff_t>(begin_));
      begin_ = 0;
    }
    items_.push_back(item);
  }
  void pop_front() { ++begin_; }
  void truncate(std::size_t size) { items_.resize(begin_ + size); }

  [[nodiscard]] std::size_t size() const { return items_.size() - begin_; }
  [[nodiscard]] const T* data() const { return items_.data() + begin_; }
  [[nodiscard]] const T& operator[](std::size_t i) const { return data()[i]; }
  [[nodiscard]] T& operator[](std::size_t i) { return items_[begin_ + i]; }
  [[nodiscard]] const T& back() const { return items_.back(); }
  [[nodiscard]] std::span<const T> all() const { return {data(), size()}; }

 private:
  std::vector<T> items_;
  std::size_t begin_ = 0;
};

}  // namespace agreed
