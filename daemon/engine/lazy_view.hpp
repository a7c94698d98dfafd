#pragma once
// A view that is worked out when somebody first looks, once, and shared by everyone who holds it.
#include <functional>
#include <memory>
#include <mutex>
#include <utility>

namespace agreed {

/// Copies share the view. Safe to look at from several threads; `make` must not touch anything that changes.
template <class View>
class LazyView {
 public:
  /// Nothing to look at.
  LazyView() : cell_(std::make_shared<Cell>()) {}
  explicit LazyView(std::function<View()> make) : cell_(std::make_shared<Cell>()) {
    cell_->make = std::move(make);
  }
  /// A view that is there already.
  LazyView(std::shared_ptr<const View> ready) : cell_(std::make_shared<Cell>()) {  // NOLINT: meant to convert
    cell_->view = std::move(ready);
  }
  LazyView(std::shared_ptr<View> ready)  // NOLINT: meant to convert
      : LazyView(std::shared_ptr<const View>(std::move(ready))) {}

  /// False for a view that was given as nothing.
  explicit operator bool() const {
    const std::lock_guard lock(cell_->mutex);
    return cell_->make || cell_->view;
  }
  const View& operator*() const { return *look(); }
  const View* operator->() const { return look(); }

 private:
  struct Cell {
    std::mutex mutex;
    std::function<View()> make;
    std::shared_ptr<const View> view;
  };

  const View* look() const {
    const std::lock_guard lock(cell_->mutex);
    if (!cell_->view) {
      cell_->view = std::make_shared<const View>(cell_->make());
      cell_->make = nullptr;  // lets go of the copy of the fold it was made from
    }
    return cell_->view.get();
  }

  std::shared_ptr<Cell> cell_;
};

}  // namespace agreed
