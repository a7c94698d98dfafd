#include "daemon/http/answer_cache.hpp"

#include "daemon/http/etag.hpp"

namespace agreed {
namespace {
constexpr std::size_t kMostBytes = 4'000'000;
}

HttpAnswer AnswerCache::get(const std::shared_ptr<const Snapshot>& snapshot, const std::string& key,
                            const std::function<std::string()>& render, const char* content_type) {
  {
    const std::scoped_lock lock(mutex_);
    if (snapshot_ != snapshot) {
      snapshot_ = snapshot;
      answers_.clear();
      bytes_ = 0;
    }
    const auto found = answers_.find(key);
    if (found != answers_.end()) return found->second;
  }
  HttpAnswer answer{200, content_type, render(), "", {}};
  answer.etag = etag_of(answer.body);
  const std::scoped_lock lock(mutex_);
  const std::size_t size = key.size() + answer.body.size();
  if (snapshot_ == snapshot && bytes_ + size <= kMostBytes && answers_.emplace(key, answer).second)
    bytes_ += size;
  return answer;
}

}  // namespace agreed
