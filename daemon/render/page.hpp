#pragma once
// The status page: HTML with its drawings, style sheet and script, made from a snapshot. Pure: no clock, no
// input or output. Nothing in it is inline style or script, nothing refers to another host, every text that
// someone else wrote is escaped, so that it stands under `Content-Security-Policy: default-src 'self'`.
#include <map>
#include <optional>
#include <span>
#include <string>
#include <string_view>

#include "core/alert/alert.hpp"
#include "daemon/engine/snapshot.hpp"
#include "daemon/version.hpp"

namespace agreed {

struct PageAnswer {
  int status = 200;
  std::string content_type;
  std::string body;
};

/// Answers GET of `path` (decoded, without its query): `/`, `/comparisons/{id}`,
/// `/charts/{analyzer}/{standard}/{measurand}`, `/alerts`, `/page.css`, `/page.js`; nothing for any other,
/// and for ids that are not configured. Before the first fold every page but the assets says `starting`.
/// No parameter of `query` has a meaning yet. `current`: open and acknowledged alerts; `resolved`: recently
/// resolved ones, newest first. The body depends on `now` only once the snapshot has not been renewed for two
/// minutes, so its hash serves as an ETag.
[[nodiscard]] std::optional<PageAnswer> render_page(std::string_view path,
                                                    const std::map<std::string, std::string>& query,
                                                    const Snapshot& snapshot, std::span<const Alert> current,
                                                    std::span<const Alert> resolved, Instant now,
                                                    std::string_view program_version = version());

}  // namespace agreed
