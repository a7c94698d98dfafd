#include <algorithm>

#include "config/parts.hpp"

namespace agreed::settings_file {
namespace {

std::optional<AllowableDifference> allowable_of(const Section& measurand) {
  const Section section = measurand.section("allowable_difference");
  if (!section.exists()) return std::nullopt;
  const AllowableDifference allowable{section.number("absolute"), section.number("percent")};
  const bool any_given = section.given("absolute") || section.given("percent");
  if (!any_given) section.error_here("found neither absolute nor percent, expected at least one of them");
  return allowable;
}

/// A percentage of nothing allows nothing.
void refuse_nothing_allowed(const Section& section, const Measurand& measurand) {
  const bool only_percent = measurand.allowable && measurand.allowable->percent &&
                            !section.section("allowable_difference").given("absolute");
  if (!only_percent) return;
  const auto& levels = measurand.decision_levels;
  if (std::any_of(levels.begin(), levels.end(),
                  [&](double level) { return !(measurand.allowable->at(level) > 0); }))
    section.error("allowable_difference",
                  "found only percent, which allows nothing at the decision level 0; expected absolute too");
}

}  // namespace

void read_measurands(const Section& top, Draft& draft) {
  for (const Section& section : top.named("measurands")) {
    Measurand measurand;
    measurand.id = section.id();
    measurand.title = section.text("title").value_or(section.id());
    measurand.unit = section.text("unit").value_or("");
    measurand.decimals = section.whole_number("decimals");
    measurand.decision_levels = section.numbers("decision_levels");
    measurand.allowable = allowable_of(section);
    refuse_nothing_allowed(section, measurand);
    draft.settings.measurands.push_back(std::move(measurand));
  }
}

}  // namespace agreed::settings_file
