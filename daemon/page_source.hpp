#pragma once
// The pages of the running service.
#include "daemon/engine/service.hpp"
#include "daemon/http/alert_source.hpp"
#include "daemon/http/router.hpp"

namespace agreed {

/// Renders pages from the service's snapshot and, for resolved alerts, from the journal. `service` outlives
/// the hook.
[[nodiscard]] PageHook pages_of(const Service& service, AlertSource alerts);

}  // namespace agreed
