#pragma once
// Invented snapshots of Harrow Mill for the tests of the page and its preview. The figures are drawn from a
// seeded generator and worked out by simple means; they look right and prove nothing.
#include <map>
#include <optional>
#include <string>
#include <vector>

#include "core/alert/alert.hpp"
#include "daemon/engine/snapshot.hpp"
#include "daemon/render/page.hpp"

namespace agreed::mill {

struct Story {
  Snapshot snapshot;
  std::vector<Alert> current, resolved;
  std::vector<FileRow> files;
};

[[nodiscard]] Story agreeing();
/// Week five: line2's lamp is worn, protein has drifted upward, alerts are open.
[[nodiscard]] Story drifting();
/// Everything configured, nothing measured.
[[nodiscard]] Story empty();
/// The first two days: charts learn, comparisons gather.
[[nodiscard]] Story gathering();
[[nodiscard]] Story starting();
/// `count` comparisons with long names.
[[nodiscard]] Story many(int count);
/// Every text that others write carries markup.
[[nodiscard]] Story hostile(const std::string& text);

/// What the page answers to GET of `path` `late` after the snapshot was made, to whoever `visitor` is: of the
/// version 9.8.7, the alerts and files from the story.
[[nodiscard]] std::optional<PageAnswer> ask(const Story& story, const std::string& path,
                                            const std::map<std::string, std::string>& parameters = {},
                                            Duration late = {}, const PageVisitor& visitor = {});

}  // namespace agreed::mill
