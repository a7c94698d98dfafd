#pragma once
// Which routes hear of what.
#include <cstddef>
#include <span>
#include <vector>

#include "config/config.hpp"
#include "core/alert/alert.hpp"

namespace agreed {

/// True if the route's filters let this alert through: its kind, its severity, and for `analyzers`,
/// `measurands` and `comparisons` one of the ids the alert is about. An alert about a comparison is about its
/// two analyzers and its measurand too. A filter that is given lets nothing through that has no such part (an
/// unreachable inbox has no measurand). Nor does a route hear that it takes nothing itself.
[[nodiscard]] bool concerns(const Route& route, const Alert& alert, const Settings& settings);

/// Positions in `routes` of those that a transition goes to; none when it is not told. A route with
/// `unacknowledged_for` hears of an alert only once it was open that long without an acknowledgement, and
/// from then on of everything.
[[nodiscard]] std::vector<std::size_t> routes_for(const AlertTransition& transition,
                                                  std::span<const Route> routes, const Settings& settings);

/// An alert that a route with `unacknowledged_for` must have been told of by now.
struct Escalation {
  const Alert* alert = nullptr;
  std::size_t route = 0;
};

/// Alerts among `current` that nobody has acknowledged and whose waiting time of a route is over. Held ones
/// wait until they are released.
[[nodiscard]] std::vector<Escalation> escalations(std::span<const SharedAlert> current,
                                                  std::span<const Route> routes, const Settings& settings,
                                                  Instant now);

}  // namespace agreed
