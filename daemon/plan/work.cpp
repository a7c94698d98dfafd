#include "daemon/plan/work.hpp"

#include <algorithm>
#include <atomic>
#include <exception>
#include <mutex>
#include <thread>

namespace agreed::plan {
namespace {

class Shift {
 public:
  Shift(const std::vector<Piece>& pieces, const Tell& tell) : pieces_(pieces), tell_(tell) {}

  void run() {
    const std::size_t processors = std::max(1U, std::thread::hardware_concurrency());
    {
      std::vector<std::jthread> helpers;
      for (std::size_t i = 1; i < std::min(processors, pieces_.size()); ++i)
        helpers.emplace_back([this] { work([](double) {}); });
      work([this](double share) {
        tell_((static_cast<double>(done_) + share) / static_cast<double>(pieces_.size()));
      });
    }
    if (failure_) std::rethrow_exception(failure_);
  }

 private:
  void work(const Tell& tell) {
    for (std::size_t i = next_++; i < pieces_.size(); i = next_++) {
      try {
        pieces_[i](tell);
      } catch (...) {
        const std::lock_guard lock(failing_);
        if (!failure_) failure_ = std::current_exception();
        next_ = pieces_.size();
      }
      ++done_;
    }
  }

  const std::vector<Piece>& pieces_;
  const Tell& tell_;
  std::atomic<std::size_t> next_{0}, done_{0};
  std::mutex failing_;
  std::exception_ptr failure_;
};

}  // namespace

void do_all(const std::vector<Piece>& pieces, const Tell& tell) {
  Shift(pieces, tell).run();
}

}  // namespace agreed::plan
