#pragma once
// The pages of the running service.
#include "daemon/engine/service.hpp"
#include "daemon/http/alert_source.hpp"
#include "daemon/http/intake_source.hpp"
#include "daemon/http/page_hook.hpp"

namespace agreed {

/// Renders pages from the service's snapshot and, for lists of alerts and files, from the journal. `service`
/// outlives the hook.
[[nodiscard]] PageHook pages_of(const Service& service, AlertSource alerts, IntakeSource intake);

}  // namespace agreed
