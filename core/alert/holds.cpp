#include "core/alert/holds.hpp"

#include <algorithm>

namespace agreed {

void Holds::add(const Intervention& intervention) {
  if (after_ <= Duration::zero() || !intervention.restarts()) return;
  windows_.push_back({intervention.analyzer, intervention.at, intervention.at + after_});
}

bool Holds::held(const std::string& analyzer, const Settings& settings, Instant now) const {
  return std::any_of(windows_.begin(), windows_.end(), [&](const Maintenance& window) {
    return window.from <= now && now < window.to && settings.of(window.analyzer).id == analyzer;
  });
}

bool Holds::held(const Subject& subject, const Settings& settings, Instant now) const {
  if (!subject.analyzer.empty()) return held(subject.analyzer, settings, now);
  return std::any_of(
      settings.comparisons.begin(), settings.comparisons.end(), [&](const ComparisonSettings& comparison) {
        return comparison.id == subject.comparison && (held(settings.of(comparison.x).id, settings, now) ||
                                                       held(settings.of(comparison.y).id, settings, now));
      });
}

}  // namespace agreed
