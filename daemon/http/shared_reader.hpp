#pragma once
// One read-only connection to the journal that the threads of the HTTP side take turns with.
#include <filesystem>
#include <memory>
#include <mutex>

#include "daemon/journal/journal.hpp"

namespace agreed {

/// Opened at the first question and opened anew after a failure. Thread-safe.
class SharedReader {
 public:
  explicit SharedReader(std::filesystem::path state) : state_(std::move(state)) {}

  /// What `question(JournalReader&)` gives. What it throws (JournalError) passes through.
  template <class Question>
  auto ask(const Question& question) {
    const std::scoped_lock lock(mutex_);
    if (!reader_) reader_ = std::make_unique<JournalReader>(state_);
    try {
      return question(*reader_);
    } catch (...) {
      reader_.reset();
      throw;
    }
  }

 private:
  const std::filesystem::path state_;
  std::mutex mutex_;
  std::unique_ptr<JournalReader> reader_;
};

}  // namespace agreed
