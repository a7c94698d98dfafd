#pragma once
// An engine that remembers what it was given: a file it was given before is repeated, one without a good row
// is rejected. It can be told to fail or to withhold its answers.
#include <algorithm>
#include <map>
#include <mutex>
#include <set>
#include <stdexcept>
#include <string>
#include <type_traits>
#include <vector>

#include "core/base/rfc3339.hpp"
#include "daemon/intake/sink.hpp"

namespace agreed::testing {

class FakeSink final : public IntakeSink {
 public:
  std::future<PieceAnswer> submit(FilePiece piece) override {
    const std::lock_guard lock(mutex_);
    ++submitted_;
    Asked asked{{}, answer_to(piece), fail_next_ > 0};
    if (asked.fails) --fail_next_;
    if (!asked.fails) pieces_.push_back(std::move(piece));
    std::future<PieceAnswer> future = asked.promise.get_future();
    withheld_.push_back(std::move(asked));
    most_withheld_ = std::max(most_withheld_, withheld_.size());
    if (!withhold_) answer_all();
    return future;
  }
  void each_portion(AnalyzerIndex, const std::function<void(TakenPortion&&)>& take) override {
    for (const FilePiece& piece : pieces())
      if (piece.growing && piece.unusable.empty())
        take({piece.file.name, piece.file.size, piece.file.mtime_ns, piece.file.sha256});
  }
  void report(AnalyzerIndex, const InboxState& state) override {
    const std::lock_guard lock(mutex_);
    state_ = state;
    ++reports_;
  }

  void fail_next(int count) {
    with([&] { fail_next_ = count; });
  }
  void withhold(bool yes) {
    with([&] {
      withhold_ = yes;
      if (!yes) answer_all();
    });
  }
  /// Answers what is withheld and goes on withholding.
  void answer_withheld() {
    with([&] { answer_all(); });
  }

  [[nodiscard]] std::vector<FilePiece> pieces() const {
    return with([&] { return pieces_; });
  }
  [[nodiscard]] std::size_t submitted() const {
    return with([&] { return submitted_; });
  }
  [[nodiscard]] std::size_t withheld() const {
    return with([&] { return withheld_.size(); });
  }
  [[nodiscard]] std::size_t most_withheld() const {
    return with([&] { return most_withheld_; });
  }
  [[nodiscard]] InboxState state() const {
    return with([&] { return state_; });
  }
  [[nodiscard]] int reports() const {
    return with([&] { return reports_; });
  }
  [[nodiscard]] std::vector<std::string> names() const {
    std::vector<std::string> names;
    for (const FilePiece& piece : pieces())
      if (piece.last) names.push_back(piece.file.name);
    return names;
  }
  [[nodiscard]] std::size_t rows() const {
    std::size_t count = 0;
    for (const FilePiece& piece : pieces()) count += piece.rows.size();
    return count;
  }

 private:
  struct Asked {
    std::promise<PieceAnswer> promise;
    PieceAnswer answer;
    bool fails = false;
  };

  template <class Do>
  std::invoke_result_t<Do> with(Do what) const {
    const std::lock_guard lock(mutex_);
    return what();
  }

  PieceAnswer answer_to(const FilePiece& piece) {
    PieceAnswer answer;
    answer.committed_at = parse_rfc3339("2026-01-05T12:00:00Z").value().at;
    good_rows_[piece.file.name] += piece.rows.size();
    if (!piece.last) return answer;
    const std::size_t good = good_rows_[piece.file.name];
    good_rows_.erase(piece.file.name);
    if (!piece.unusable.empty() || (good == 0 && !piece.bad.empty())) {
      answer.outcome = FileOutcome::rejected;
      answer.reason = piece.unusable.empty() ? piece.bad.front().reason : piece.unusable;
    } else {
      answer.outcome = known_.insert(piece.file.sha256).second ? FileOutcome::done : FileOutcome::repeated;
    }
    return answer;
  }

  void answer_all() {
    for (Asked& asked : withheld_) {
      if (asked.fails)
        asked.promise.set_exception(std::make_exception_ptr(std::runtime_error("disk full")));
      else
        asked.promise.set_value(asked.answer);
    }
    withheld_.clear();
  }

  mutable std::mutex mutex_;
  std::vector<FilePiece> pieces_;
  std::vector<Asked> withheld_;
  std::map<std::string, std::size_t> good_rows_;
  std::set<std::string> known_;
  InboxState state_;
  std::size_t submitted_ = 0, most_withheld_ = 0;
  int fail_next_ = 0, reports_ = 0;
  bool withhold_ = false;
};

}  // namespace agreed::testing
