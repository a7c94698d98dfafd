#include "core/alert/cause.hpp"

#include <array>
#include <cmath>
#include <string_view>

#include "core/alert/details.hpp"
#include "core/base/rfc3339.hpp"

namespace agreed {
namespace {
constexpr double kSameProbability = 0.05;
constexpr std::array<std::string_view, 9> kNames = {
    "moved",        "probability",     "evidence",        "look_back_from",   "look_back_from_is",
    "look_back_to", "look_back_pairs", "look_back_hours", "look_back_samples"};

Details details_of(const DiagnosisView& diagnosis, const LookBackView& look_back) {
  return {{"moved", to_string(diagnosis.moved)},
          {"probability", diagnosis.probability},
          {"evidence", diagnosis.evidence},
          {"look_back_from", to_rfc3339(look_back.from)},
          {"look_back_from_is", look_back.from_is()},
          {"look_back_to", to_rfc3339(look_back.to)},
          {"look_back_pairs", static_cast<double>(look_back.pairs)},
          {"look_back_hours", look_back.hours},
          {"look_back_samples", look_back.samples}};
}

bool says_the_same(const Details& told, const Details& now) {
  const auto probability = number_in(told, "probability");
  return probability && text_in(told, "moved") == text_in(now, "moved") &&
         text_in(told, "look_back_from") == text_in(now, "look_back_from") &&
         std::abs(*probability - number_in(now, "probability").value_or(0)) < kSameProbability;
}
}  // namespace

bool has_cause(const Finding& finding) {
  return finding.holds &&
         (finding.kind == AlertKind::agreement_lost || finding.kind == AlertKind::agreement_drifting);
}

void add_cause(Finding& finding, const DiagnosisView& diagnosis, const LookBackView& look_back,
               const Alert* told) {
  const Details now = details_of(diagnosis, look_back);
  const bool stays =
      told != nullptr && finding.severity <= told->severity && says_the_same(told->details, now);
  for (const std::string_view name : kNames)
    for (const auto& [known, value] : stays ? told->details : now)
      if (known == name) set_detail(finding.details, name, value);
  // The start that the evidence speaks of.
  if (stays) {
    finding.started_at = told->started_at;
    finding.started_between = told->started_between;
  } else if (diagnosis.started_at) {
    finding.started_at = diagnosis.started_at;
    finding.started_between = diagnosis.started_between;
  }
}

}  // namespace agreed
