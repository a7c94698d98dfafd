#pragma once
// The pages of the family, and the parts they share. Everything returns HTML.
#include <cstdint>
#include <map>
#include <optional>
#include <span>
#include <string>
#include <string_view>

#include "core/alert/alert.hpp"
#include "daemon/render/page_scene.hpp"
#include "daemon/render/page_words.hpp"

namespace agreed {

struct PageInput {
  const Snapshot& snapshot;
  std::span<const Alert> current, resolved;
  Instant now;
  std::string_view version;
};

// The contents of <main>.
[[nodiscard]] std::string overview_html(const PageInput& input);
[[nodiscard]] std::string comparison_html(const PageInput& input, ComparisonIndex index);
[[nodiscard]] std::string chart_html(const PageInput& input, ChartIndex index);
[[nodiscard]] std::string alerts_html(const PageInput& input);

/// The whole document around `main`. `title` is plain text.
[[nodiscard]] std::string document_html(const PageInput& input, std::string_view title,
                                        const std::string& main);

[[nodiscard]] std::string link_html(const std::string& path, std::string_view words);
/// The answer large, with its shape, since when, and its sentences.
[[nodiscard]] std::string answer_html(const Answer& answer, bool foremost);
/// "Yes" with its shape, for a line of a list.
[[nodiscard]] std::string answer_badge_html(const Answer& answer);
[[nodiscard]] std::string chart_badge_html(ChartState state);
[[nodiscard]] std::string alert_html(const PageInput& input, const Alert& alert, int level);
[[nodiscard]] std::string warnings_html(const std::vector<std::string>& warnings);
/// A section with the current alerts of exactly this subject; empty when there are none.
[[nodiscard]] std::string alerts_of_html(const PageInput& input, const Subject& subject);

}  // namespace agreed
