#include "daemon/http/intake_source.hpp"

#include <memory>

#include "daemon/http/shared_reader.hpp"

namespace agreed {

IntakeSource journal_intake(std::filesystem::path state) {
  const auto shared = std::make_shared<SharedReader>(std::move(state));
  return {[shared](const FileQuery& query) {
            return shared->ask([&](JournalReader& reader) { return reader.files(query); });
          },
          [shared](const ReadingQuery& query) {
            return shared->ask([&](JournalReader& reader) { return reader.readings(query); });
          }};
}

}  // namespace agreed
