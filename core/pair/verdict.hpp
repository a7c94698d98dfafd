#pragma once
// Purpose: when the comparison's verdict moves: never on one look, so that looking after every pair does not
//   call falsely.
// Inputs: at every pair, what each decision level's intervals say.
// Method: own. `disagreement_shown` needs the alert interval wholly outside at one level, on one side, on
//   `confirm` pairs in a row; `agreement_shown` needs all levels covered and their 90 % interval inside on
//   `confirm` pairs in a row; either is given up for `inconclusive` when it was not supported on `confirm`
//   pairs in a row. A level that is not covered supports nothing.
// Degenerate: below `least_pairs`, or blocked: `gathering`; leaving it shows `inconclusive` first. After a
//   change found by the pair chart: `inconclusive` until `least_pairs`, disagreement may be shown from 8
//   pairs on.
// Cost: O(levels) a pair.
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "core/base/instant.hpp"
#include "core/pair/bias.hpp"
#include "core/pair/comparison_view.hpp"

namespace agreed {

/// Reasons of a verdict, beside those of a missing fit and of a missing error ratio.
namespace verdict_reason {
inline constexpr std::string_view too_few_pairs = "too_few_pairs";
inline constexpr std::string_view no_decision_levels = "no_decision_levels";
inline constexpr std::string_view no_allowable_difference = "no_allowable_difference";
inline constexpr std::string_view restarted_after_change = "restarted_after_change";
inline constexpr std::string_view not_covered = "not_covered";
/// The interval reaches across a limit of the allowable difference.
inline constexpr std::string_view not_decided = "not_decided";
/// Supported now, on fewer than `confirm` pairs in a row.
inline constexpr std::string_view not_confirmed = "not_confirmed";
}  // namespace verdict_reason

/// What one decision level says at one pair.
struct LevelStatement {
  bool covered = false;               ///< the level lies within the range of the window
  Position plain = Position::across;  ///< of the 90 % interval
  Position alert = Position::across;  ///< of the interval at alert_confidence
};

struct VerdictInput {
  Instant at;
  int pairs = 0;             ///< in the window
  std::string_view blocked;  ///< why there can be no verdict yet; empty: there can
  std::string_view no_fit;   ///< why there is no fit; empty: there is one
  std::span<const LevelStatement> levels;
};

class VerdictMachine {
 public:
  /// Pairs after a change from which on disagreement may be shown.
  static constexpr int least_after_change = 8;

  VerdictMachine(std::size_t levels, int confirm, int least_pairs);

  /// Takes what a new pair says; the verdict it moves to, if it moves.
  std::optional<Verdict> step(const VerdictInput& input);
  /// An intervention: all begins anew.
  void begin_stretch(Instant at);
  /// The pair chart found a change: inconclusive until the pairs since it say more.
  void restart_after_change(Instant at);
  /// Says why there is nothing yet, before the first pair.
  void block(std::string_view reason) { reason_ = reason; }

  [[nodiscard]] Verdict verdict() const { return verdict_; }
  [[nodiscard]] std::optional<Instant> since() const { return since_; }
  [[nodiscard]] const std::string& reason() const { return reason_; }
  /// Pairs of a stretch restarted after a change, still below `least_pairs`.
  [[nodiscard]] bool restarted() const { return restarted_; }
  /// The position on which `confirm` pairs in a row agree at a level, above or below; else across.
  [[nodiscard]] Position confirmed(std::size_t level) const;

 private:
  void forget_rows();
  void count_rows(const VerdictInput& input, bool enough);
  [[nodiscard]] Verdict decide(bool enough) const;
  [[nodiscard]] std::string_view why_inconclusive(const VerdictInput& input, bool enough) const;
  void move_to(Verdict verdict, Instant at);

  struct Rows {
    int above = 0, below = 0;
  };
  int confirm_, least_pairs_;
  Verdict verdict_ = Verdict::gathering;
  std::optional<Instant> since_;
  std::string reason_{verdict_reason::too_few_pairs};
  bool restarted_ = false;
  std::vector<Rows> rows_;  ///< by level: pairs in a row on which disagreement is shown
  int agreement_row_ = 0;
  int unsupported_row_ = 0;
};

}  // namespace agreed
