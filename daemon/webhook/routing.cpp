#include "daemon/webhook/routing.hpp"

#include <algorithm>

namespace agreed {
namespace {

template <class Value>
bool contains(const std::vector<Value>& list, const Value& value) {
  return std::find(list.begin(), list.end(), value) != list.end();
}

/// An empty filter lets everything through.
bool passes(const std::vector<std::string>& filter, const std::vector<std::string>& ids) {
  return filter.empty() ||
         std::any_of(ids.begin(), ids.end(), [&](const auto& id) { return contains(filter, id); });
}

struct AlertIds {
  std::vector<std::string> analyzers, measurands, comparisons;
};

AlertIds ids_of(const Subject& subject, const Settings& settings) {
  AlertIds ids;
  if (!subject.analyzer.empty()) ids.analyzers.push_back(subject.analyzer);
  if (!subject.measurand.empty()) ids.measurands.push_back(subject.measurand);
  if (subject.comparison.empty()) return ids;
  ids.comparisons.push_back(subject.comparison);
  for (const auto& comparison : settings.comparisons)
    if (comparison.id == subject.comparison) {
      ids.analyzers.push_back(settings.of(comparison.x).id);
      ids.analyzers.push_back(settings.of(comparison.y).id);
      ids.measurands.push_back(settings.of(comparison.measurand).id);
    }
  return ids;
}

/// Whether such a route has been, or is now, told of the alert: nobody acknowledged it in time.
bool waited_in_vain(const AlertTransition& transition, Duration wait) {
  const Alert& alert = transition.alert;
  const Instant until = alert.opened_at + wait;
  if (transition.at < until) return false;
  return !alert.acknowledged || alert.acknowledged->at >= until;
}

}  // namespace

bool concerns(const Route& route, const Alert& alert, const Settings& settings) {
  if (!route.kinds.empty() && !contains(route.kinds, alert.kind)) return false;
  if (alert.severity < route.at_least) return false;
  if (alert.kind == AlertKind::delivery_failing && alert.subject.service == route.name) return false;
  const AlertIds ids = ids_of(alert.subject, settings);
  return passes(route.analyzers, ids.analyzers) && passes(route.measurands, ids.measurands) &&
         passes(route.comparisons, ids.comparisons);
}

std::vector<std::size_t> routes_for(const AlertTransition& transition, std::span<const Route> routes,
                                    const Settings& settings) {
  std::vector<std::size_t> chosen;
  if (!transition.tell) return chosen;
  for (std::size_t i = 0; i < routes.size(); ++i) {
    const auto& wait = routes[i].unacknowledged_for;
    if (wait && !waited_in_vain(transition, *wait)) continue;
    if (concerns(routes[i], transition.alert, settings)) chosen.push_back(i);
  }
  return chosen;
}

std::vector<Escalation> escalations(std::span<const SharedAlert> current, std::span<const Route> routes,
                                    const Settings& settings, Instant now) {
  std::vector<Escalation> due;
  for (const SharedAlert& alert : current) {
    if (alert->state != AlertState::open || alert->held) continue;
    for (std::size_t i = 0; i < routes.size(); ++i) {
      const auto& wait = routes[i].unacknowledged_for;
      if (!wait) continue;
      if (alert->opened_at + *wait <= now && concerns(routes[i], *alert, settings))
        due.push_back({alert.get(), i});
    }
  }
  return due;
}

}  // namespace agreed
