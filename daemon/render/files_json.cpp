#include "daemon/render/files_json.hpp"

#include "daemon/printable.hpp"
#include "daemon/render/json_parts.hpp"

namespace agreed {
namespace {

Json rejected_of(const std::vector<RejectedRow>& rows) {
  Json list = Json::array();
  for (const RejectedRow& row : rows)
    list.push_back({{"line", row.line == 0 ? Json(nullptr) : Json(row.line)},
                    {"column", row.column == 0 ? Json(nullptr) : Json(row.column)},
                    {"text", printable(row.text)},
                    {"reason", row.reason}});
  return list;
}

Json file_of(const FileRow& file) {
  return {{"id", std::to_string(file.id)},
          {"analyzer", file.analyzer},
          {"name", printable(file.name)},
          {"sha256", file.sha256},
          {"size", file.size},
          {"outcome", json_words(file.outcome)},
          {"reason", json_words(file.reason)},
          {"rows", {{"accepted", file.accepted}, {"repeated", file.repeated}, {"rejected", file.rejected}}},
          {"rejected_rows", rejected_of(file.rejected_rows)},
          {"received_at", to_rfc3339(file.received_at)},
          {"committed_at", json_time(file.committed_at)}};
}

}  // namespace

std::string files_json(const std::vector<FileRow>& files, const std::optional<std::string>& next) {
  return json_page("files", files, file_of, next);
}

}  // namespace agreed
