#pragma once
// The sentences of the page about comparisons: what is shown, how large, since when. Plain text, not escaped.
#include <optional>
#include <string>
#include <vector>

#include "daemon/render/page_scene.hpp"

namespace agreed {

/// `out_of_date`: agreement was shown, and newer pairs are overdue; `interrupted`: it was shown, and nothing
/// can be taken in.
enum class AnswerKind { yes, no, not_yet, starting, out_of_date, interrupted };

/// The answer to "do they agree?".
struct Answer {
  AnswerKind kind = AnswerKind::not_yet;
  std::string word;      ///< "Yes", "No", "Not yet", "Starting", "Out of date", "Interrupted"
  std::string verdict;   ///< "agreement shown"
  std::string since;     ///< "since 2026-01-12 14:00 UTC (12 days)"; empty when there is no such time
  std::string sentence;  ///< how large against what is allowable: of the means and of single results
  std::vector<std::string> more;  ///< a change under way, what was shown before
  std::string age{};              ///< how old the newest evidence is; empty when there is none
};

/// What the pairs say, however old they are.
[[nodiscard]] Answer answer_for(const ComparisonScene& scene);
/// The same with its age, and with other words when that is more than the cadence allows.
[[nodiscard]] Answer current_answer(const Snapshot& snapshot, const ComparisonScene& scene);
/// Says so when the service takes nothing in, so that a "Yes" cannot be contradicted any more.
void tell_interrupted(Answer& answer, const Snapshot& snapshot);
/// Of all comparisons together; of a single one the same as current_answer with the name in front.
[[nodiscard]] Answer overall_answer(const Snapshot& snapshot);

/// "since 2026-01-12 14:00 UTC (12 days)"; empty without a time.
[[nodiscard]] std::string since_words(const std::optional<Instant>& since, Instant now);
/// The pair chart signals.
[[nodiscard]] bool drifting(const ComparisonView& view);
/// Agreement was lost and the verdict says neither that it is back nor, any more, that it is not.
[[nodiscard]] bool is_lost(const ComparisonView& view);
/// The level that carries the sentence: among those that have the comparison's verdict when it is not good,
/// else among all.
[[nodiscard]] std::optional<std::size_t> speaking_level(const ComparisonView& view);
/// How much of the allowable difference the bias takes; only of a level that has both.
[[nodiscard]] double share_taken(const LevelView& level);
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
