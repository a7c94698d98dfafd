#pragma once
// Answers made from one snapshot, kept until the next one comes.
#include <functional>
#include <map>
#include <memory>
#include <mutex>
#include <string>

#include "daemon/engine/snapshot.hpp"
#include "daemon/http/message.hpp"

namespace agreed {

class AnswerCache {
 public:
  /// The answer called `key` of `snapshot`, JSON unless said otherwise, rendered now if it is not kept.
  /// Bodies beyond 4 MB together are made anew each time.
  [[nodiscard]] HttpAnswer get(const std::shared_ptr<const Snapshot>& snapshot, const std::string& key,
                               const std::function<std::string()>& render,
                               const char* content_type = "application/json");

 private:
  std::mutex mutex_;
  std::shared_ptr<const Snapshot> snapshot_;
  std::map<std::string, HttpAnswer> answers_;
  std::size_t bytes_ = 0;
};

}  // namespace agreed
