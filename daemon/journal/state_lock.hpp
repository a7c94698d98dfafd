#pragma once
// One service per state folder.
#include <filesystem>

#include "daemon/journal/journal_types.hpp"

namespace agreed {

/// Holds the lock of a state folder; throws JournalError naming the other process if it is taken.
class StateLock {
 public:
  explicit StateLock(const std::filesystem::path& folder);
  ~StateLock();
  StateLock(const StateLock&) = delete;
  StateLock& operator=(const StateLock&) = delete;

 private:
  int descriptor_ = -1;
};

}  // namespace agreed
