#pragma once
// The status page: HTML with its drawings, style sheet and script, made from a snapshot. Pure: no clock, no
// input or output. Nothing in it is inline style or script, nothing refers to another host, every text that
// someone else wrote is escaped, so that it stands under `Content-Security-Policy: default-src 'self'`.
#include <map>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "core/alert/alert.hpp"
#include "daemon/engine/snapshot.hpp"
#include "daemon/journal/journal_reader.hpp"
#include "daemon/render/page_visitor.hpp"
#include "daemon/version.hpp"

namespace agreed {

/// What every page is made from.
struct PageInput {
  const Snapshot& snapshot;
  std::span<const Alert> current;  ///< open and acknowledged alerts
  Instant now;
  std::string_view version = agreed::version();
  PageVisitor visitor{};
  std::string here = "/";  ///< path and query as asked for: where a form leads back to
  std::string notice{};    ///< plain text shown first: what became of a form
};

struct PageAnswer {
  int status = 200;
  std::string content_type;
  std::string body;
  std::string fingerprint;  ///< of all but the time of the figures; empty: the body is its own
};

/// One page of a list from the journal.
struct AlertList {
  std::vector<AlertRecord> records;  ///< newest first
  std::string state;                 ///< the filter as asked for, "open,acknowledged"; empty: all
  std::string after;                 ///< cursor this page begins behind; empty: the first page
  std::string next;                  ///< cursor of the following page; empty: none
};
struct FileList {
  std::vector<FileRow> files;  ///< newest first
  std::string outcome, analyzer, after, next;
};

/// Answers GET of `path` (decoded, without its query): `/`, `/comparisons/{id}`,
/// `/charts/{analyzer}/{standard}/{measurand}`, `/page.css`, `/page.js`; nothing for any other, and for ids
/// that are not configured. `parameters`: `points` or `pairs` and `from` cut what is drawn (page_range.hpp);
/// a wrong one makes status 400 and is told. Before the first fold every page but the assets says `starting`.
/// Two answers with one fingerprint show the same, but for the time of the figures.
[[nodiscard]] std::optional<PageAnswer> render_page(std::string_view path,
                                                    const std::map<std::string, std::string>& parameters,
                                                    const PageInput& input);

[[nodiscard]] PageAnswer render_alerts(const PageInput& input, const AlertList& list);
[[nodiscard]] PageAnswer render_alert(const PageInput& input, const AlertRecord& record);
[[nodiscard]] PageAnswer render_files(const PageInput& input, const FileList& list);
/// `to`: the path to go on to.
[[nodiscard]] PageAnswer render_sign_in(const PageInput& input, const std::string& to);
/// A page that only says something: `title`, then `input.notice`.
[[nodiscard]] PageAnswer render_words(const PageInput& input, std::string_view title, int status);

}  // namespace agreed
