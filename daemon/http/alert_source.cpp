#include "daemon/http/alert_source.hpp"

#include <memory>
#include <mutex>

namespace agreed {
namespace {

/// One reader that threads take turns with.
class SharedReader {
 public:
  explicit SharedReader(std::filesystem::path state) : state_(std::move(state)) {}

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

}  // namespace

AlertSource journal_alerts(std::filesystem::path state) {
  const auto shared = std::make_shared<SharedReader>(std::move(state));
  return {[shared](const AlertQuery& query) {
            return shared->ask([&](JournalReader& reader) { return reader.alerts(query); });
          },
          [shared](std::int64_t id) {
            return shared->ask([&](JournalReader& reader) { return reader.alert(id); });
          }};
}

}  // namespace agreed
