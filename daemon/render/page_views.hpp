#pragma once
// The pages of the family, and the parts they share. Everything returns HTML.
#include <optional>
#include <string>
#include <string_view>

#include "daemon/render/page.hpp"
#include "daemon/render/page_figure.hpp"
#include "daemon/render/page_range.hpp"
#include "daemon/render/page_scene.hpp"
#include "daemon/render/page_words.hpp"

namespace agreed {

// The contents of <main>.
[[nodiscard]] std::string overview_html(const PageInput& input);
[[nodiscard]] std::string comparison_html(const PageInput& input, ComparisonIndex index,
                                          const PageRange& range);
[[nodiscard]] std::string chart_html(const PageInput& input, ChartIndex index, const PageRange& range);

/// What every page says at its foot.
inline constexpr std::string_view kCautions =
    "Results are statistical evidence and not a release decision. Where a wrong result can hurt someone "
    "(clinical, drinking water, process safety, dosing), the local regulation, the accredited procedure and "
    "the "
    "licensed or responsible person decide; agreed is not a medical device and no safety interlock.";

// Parts of one comparison's page.
[[nodiscard]] DataTable level_table(const ComparisonScene& scene);
/// Which pairs the fit goes through, and the warnings.
[[nodiscard]] std::string window_html(const ComparisonScene& scene);
/// What changed, which analyzer moved, which results are in doubt; empty when nothing is open.
[[nodiscard]] std::string change_html(const ComparisonView& view);
/// Errors, scatter, range, second opinion.
[[nodiscard]] std::string basis_html(const ComparisonScene& scene);

struct PageLife {
  int status = 200;
  bool renewed = true;  ///< the script keeps it current
};
/// The whole document around `main`. `title` is plain text.
[[nodiscard]] PageAnswer document(const PageInput& input, std::string_view title, const std::string& main,
                                  const PageLife& life = {});
/// The hidden field that makes a form ours.
[[nodiscard]] std::string form_key_html(const PageVisitor& visitor);
/// Leads to signing in and from there back to where we are.
[[nodiscard]] std::string sign_in_link_html(const PageInput& input, std::string_view words);

[[nodiscard]] std::string link_html(const std::string& path, std::string_view words);

/// One of the ways a list may be cut: what its parameter is, and what it is called.
struct Choice {
  const char* value;
  const char* words;
};
/// As an item of a `nav.choice`.
[[nodiscard]] std::string choice_link(const std::string& path, const std::string& words, bool chosen);
/// The answer large, with its shape, since when, and its sentences.
[[nodiscard]] std::string answer_html(const Answer& answer, bool foremost);
/// That the service is starting, in the same form; empty when it has started.
[[nodiscard]] std::string starting_html(const PageInput& input);
/// "Yes" with its shape, for a line of a list.
[[nodiscard]] std::string answer_badge_html(const Answer& answer);
[[nodiscard]] std::string chart_badge_html(ChartState state);
/// `level`: of its heading.
[[nodiscard]] std::string alert_html(const PageInput& input, const Alert& alert, int level);
/// A word in a frame with a shape of its own, so that it is known without its colour.
[[nodiscard]] std::string severity_badge_html(Severity severity);
[[nodiscard]] std::string file_badge_html(const std::string& outcome);
[[nodiscard]] std::string warnings_html(const std::vector<std::string>& warnings);
/// A section with the current alerts of exactly this subject; empty when there are none.
[[nodiscard]] std::string alerts_of_html(const PageInput& input, const Subject& subject);

}  // namespace agreed
