#include "core/pair/verdict.hpp"

#include <algorithm>

namespace agreed {
namespace {
bool agrees(const LevelStatement& level) {
  return level.covered && level.plain == Position::inside;
}
bool disagrees(const LevelStatement& level) {
  return level.covered && (level.alert == Position::above || level.alert == Position::below);
}
}  // namespace

VerdictMachine::VerdictMachine(std::size_t levels, int confirm, int least_pairs)
    : confirm_(confirm), least_pairs_(least_pairs), rows_(levels) {}

std::optional<Verdict> VerdictMachine::step(const VerdictInput& input) {
  const Verdict before = verdict_;
  const bool enough = input.pairs >= least_pairs_;
  if (enough) restarted_ = false;
  if (!input.blocked.empty() || !(enough || restarted_)) {
    forget_rows();
    move_to(Verdict::gathering, input.at);
    reason_ = input.blocked.empty() ? verdict_reason::too_few_pairs : input.blocked;
  } else {
    count_rows(input, enough);
    move_to(before == Verdict::gathering ? Verdict::inconclusive : decide(enough), input.at);
    reason_ = verdict_ == Verdict::inconclusive ? why_inconclusive(input, enough) : std::string_view();
  }
  return verdict_ == before ? std::nullopt : std::optional(verdict_);
}

void VerdictMachine::begin_stretch(Instant at) {
  forget_rows();
  restarted_ = false;
  move_to(Verdict::gathering, at);
  reason_ = verdict_reason::too_few_pairs;
}

void VerdictMachine::restart_after_change(Instant at) {
  forget_rows();
  restarted_ = true;
  move_to(Verdict::inconclusive, at);
  reason_ = verdict_reason::restarted_after_change;
}

Position VerdictMachine::confirmed(std::size_t level) const {
  if (rows_[level].above >= confirm_) return Position::above;
  if (rows_[level].below >= confirm_) return Position::below;
  return Position::across;
}

void VerdictMachine::forget_rows() {
  std::fill(rows_.begin(), rows_.end(), Rows{});
  agreement_row_ = 0;
  unsupported_row_ = 0;
}

void VerdictMachine::count_rows(const VerdictInput& input, bool enough) {
  const auto& levels = input.levels;
  const bool may_disagree = input.no_fit.empty() && (enough || input.pairs >= least_after_change);
  const bool may_agree = input.no_fit.empty() && enough;
  for (std::size_t i = 0; i < rows_.size(); ++i) {
    const bool counts = may_disagree && disagrees(levels[i]);
    rows_[i].above = counts && levels[i].alert == Position::above ? rows_[i].above + 1 : 0;
    rows_[i].below = counts && levels[i].alert == Position::below ? rows_[i].below + 1 : 0;
  }
  const bool agreement = may_agree && std::all_of(levels.begin(), levels.end(), agrees);
  const bool disagreement = may_disagree && std::any_of(levels.begin(), levels.end(), disagrees);
  agreement_row_ = agreement ? agreement_row_ + 1 : 0;
  const bool supported = (verdict_ == Verdict::agreement_shown && agreement) ||
                         (verdict_ == Verdict::disagreement_shown && disagreement);
  unsupported_row_ = supported ? 0 : unsupported_row_ + 1;
}

Verdict VerdictMachine::decide(bool enough) const {
  for (std::size_t i = 0; i < rows_.size(); ++i)
    if (confirmed(i) != Position::across) return Verdict::disagreement_shown;
  if (enough && agreement_row_ >= confirm_) return Verdict::agreement_shown;
  return unsupported_row_ >= confirm_ ? Verdict::inconclusive : verdict_;
}

std::string_view VerdictMachine::why_inconclusive(const VerdictInput& input, bool enough) const {
  if (!enough) return verdict_reason::restarted_after_change;
  if (!input.no_fit.empty()) return input.no_fit;
  const auto& levels = input.levels;
  const bool all_covered = std::all_of(levels.begin(), levels.end(), [](const auto& l) { return l.covered; });
  const bool covered_agree =
      std::all_of(levels.begin(), levels.end(), [](const auto& l) { return !l.covered || agrees(l); });
  if (!all_covered && covered_agree) return verdict_reason::not_covered;
  const bool something = std::any_of(levels.begin(), levels.end(), disagrees);
  return agreement_row_ > 0 || something ? verdict_reason::not_confirmed : verdict_reason::not_decided;
}

void VerdictMachine::move_to(Verdict verdict, Instant at) {
  if (verdict == verdict_) return;
  verdict_ = verdict;
  since_ = at;
  unsupported_row_ = 0;
}

}  // namespace agreed
