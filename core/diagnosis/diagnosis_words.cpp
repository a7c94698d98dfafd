#include "core/diagnosis/diagnosis_words.hpp"

#include <array>
#include <cmath>

#include "core/base/number_text.hpp"
#include "core/base/rfc3339.hpp"

namespace agreed {
namespace {
constexpr int kDigitsWithoutDecimals = 3;

std::string percent(double share) {
  return fixed(100 * share, 0) + " %";
}

/// "five", and "15" from eleven on.
std::string in_words(int count) {
  constexpr std::array<const char*, 11> words = {"no",  "one",   "two",   "three", "four", "five",
                                                 "six", "seven", "eight", "nine",  "ten"};
  return count < static_cast<int>(words.size()) ? words[static_cast<std::size_t>(count)]
                                                : std::to_string(count);
}
}  // namespace

DiagnosisWords::DiagnosisWords(const Settings& settings, ComparisonIndex comparison)
    : x_(settings.of(settings.of(comparison).x).id), y_(settings.of(settings.of(comparison).y).id) {
  const Measurand& measurand = settings.of(settings.of(comparison).measurand);
  unit_ = measurand.unit.empty() ? "" : " " + measurand.unit;
  decimals_ = measurand.decimals;
}

std::string DiagnosisWords::amount(double value) const {
  return (decimals_ ? fixed(value, *decimals_ + 1) : significant(value, kDigitsWithoutDecimals)) + unit_;
}

std::string DiagnosisWords::start(const DiagnosisView& view) const {
  std::string text = "Since " + time_words(*view.started_at);
  const Period& between = *view.started_between;
  if (between.first != between.last)
    text +=
        " (a start from " + time_words(between.first) + " to " + time_words(between.last) + " is possible)";
  return text;
}

std::string DiagnosisWords::pairs(const DiagnosisView& view) const {
  return start(view) + " " + y_ + " reads " + amount(std::abs(*view.shift_pairs)) +
         (*view.shift_pairs < 0 ? " lower" : " higher") + " against " + x_ +
         " than before (split samples: standard error " + amount(*view.se_pairs) + ", " +
         counted(view.pairs_before, "pair", "pairs") + " before, " + std::to_string(view.pairs_after) +
         " after).";
}

std::string DiagnosisWords::checks(const std::string& analyzer, const std::optional<double>& shift,
                                   const std::optional<double>& se, int before, int after) const {
  const std::string readings =
      counted(before, "reading", "readings") + " before, " + std::to_string(after) + " after";
  if (!shift) return "those of " + analyzer + " are too few to tell (" + readings + ")";
  const std::string size = amount(std::abs(*shift));
  return "those of " + analyzer + " moved by " + (*shift < 0 ? "-" : "+") + size + " (standard error " +
         amount(*se) + ", " + readings + ")";
}

std::string DiagnosisWords::all_checks(const DiagnosisView& view) const {
  return " The check standards over the same time: " +
         checks(x_, view.shift_x, view.se_x, view.x_readings_before, view.x_readings_after) + "; " +
         checks(y_, view.shift_y, view.se_y, view.y_readings_before, view.y_readings_after) + ".";
}

std::string DiagnosisWords::who(Moved moved) const {
  switch (moved) {
    case Moved::x:
      return x_ + " has moved";
    case Moved::y:
      return y_ + " has moved";
    case Moved::both:
      return "both have moved";
    default:
      return "neither has moved and the samples differ between them";
  }
}

std::string DiagnosisWords::what_decides(const std::optional<MoreReadings>& more) const {
  if (!more) return " More check readings alone will hardly decide it.";
  const int count = std::max(more->on_x, more->on_y);
  const std::string where = more->on_y == 0 ? x_ : more->on_x == 0 ? y_ : "each of " + x_ + " and " + y_;
  return " About " + in_words(count) + " more check " + (count == 1 ? "reading" : "readings") + " on " +
         where + " would decide it.";
}

std::string DiagnosisWords::no_moment() const {
  return "The pairs show no one moment at which the relation of " + x_ + " and " + y_ +
         " changed, so there is no before and after to compare the check standards over.";
}

std::string DiagnosisWords::too_few_pairs(const DiagnosisView& view) const {
  return start(view) + " the relation of " + x_ + " and " + y_ +
         " is another, from too few pairs to say by how much (" +
         counted(view.pairs_before, "pair", "pairs") + " before, " + std::to_string(view.pairs_after) +
         " after).";
}

std::string DiagnosisWords::decided(const DiagnosisView& view) const {
  return pairs(view) + all_checks(view) + " So " + who(view.moved) + " (probability " +
         percent(view.probability) + ").";
}

std::string DiagnosisWords::undecided(const DiagnosisView& view, Moved most_probable,
                                      const std::optional<MoreReadings>& more) const {
  return pairs(view) + all_checks(view) + " Which one moved is not decided: most probable is that " +
         who(most_probable) + " (" + percent(view.probability) + ")." + what_decides(more);
}

}  // namespace agreed
