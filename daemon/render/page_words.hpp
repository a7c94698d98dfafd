#pragma once
// The sentences of the page about comparisons: what is shown, how large, since when. Plain text, not escaped.
#include <optional>
#include <string>
#include <vector>

#include "daemon/render/page_scene.hpp"

namespace agreed {

enum class AnswerKind { yes, no, not_yet, starting };

/// The answer to "do they agree?".
struct Answer {
  AnswerKind kind = AnswerKind::not_yet;
  std::string word;      ///< "Yes", "No", "Not yet", "Starting"
  std::string verdict;   ///< "agreement shown"
  std::string since;     ///< "since 2026-01-12 14:00 UTC (12 days)"; empty when there is no such time
  std::string sentence;  ///< how large against what is allowable: of the means and of single results
  std::vector<std::string> more;  ///< a change under way, what was shown before
};

[[nodiscard]] Answer answer_for(const ComparisonScene& scene);
/// Of all comparisons together; of a single one the same as answer_for with the name in front.
[[nodiscard]] Answer overall_answer(const Snapshot& snapshot);

/// The decision level whose bias is largest against its allowable difference.
[[nodiscard]] std::optional<std::size_t> foremost_level(const ComparisonView& view);

/// "line2 reads 0.020 g/100 g higher than line1".
[[nodiscard]] std::string bias_direction(const ComparisonScene& scene, double bias);
[[nodiscard]] std::string level_words(const ComparisonScene& scene, const LevelView& level);
[[nodiscard]] std::string verdict_words(Verdict verdict);
[[nodiscard]] std::string reason_words(const std::string& reason);
[[nodiscard]] std::string pairs_words(const ComparisonScene& scene);
[[nodiscard]] std::string difference_words(const ComparisonScene& scene);
[[nodiscard]] std::string pair_chart_words(const ComparisonScene& scene);
[[nodiscard]] std::string error_words(const ComparisonScene& scene);
[[nodiscard]] std::string scatter_words(const ComparisonScene& scene);
/// How many false alerts are to be expected, and of which kinds; empty when nothing is watched.
[[nodiscard]] std::string budget_words(const AlarmBudget& budget);
/// "between A and B", "at A".
[[nodiscard]] std::string beginning_words(const std::optional<Instant>& at,
                                          const std::optional<Period>& between);
/// What a warning of a chart or comparison says; an unknown one as it is.
[[nodiscard]] std::string warning_words(const std::string& code);

}  // namespace agreed
