#include "daemon/http/alert_source.hpp"

#include <memory>

#include "daemon/http/shared_reader.hpp"

namespace agreed {

AlertSource journal_alerts(std::filesystem::path state) {
  const auto shared = std::make_shared<SharedReader>(std::move(state));
  return {[shared](const AlertQuery& query) {
            return shared->ask([&](JournalReader& reader) { return reader.alerts(query); });
          },
          [shared](std::int64_t id) {
            return shared->ask([&](JournalReader& reader) { return reader.alert(id); });
          },
          [shared] { return shared->ask([](JournalReader& reader) { return reader.message_counts(); }); }};
}

}  // namespace agreed
