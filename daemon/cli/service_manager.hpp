#pragma once
// What the service tells systemd (sd_notify(3)); nothing when nobody listens.
#include <chrono>
#include <optional>
#include <string>

namespace agreed::service_manager {

/// The service answers, or a reload is over, whatever came of it; `status` is for `systemctl status`.
void tell_ready(const std::string& status);
/// A reload begins.
void tell_reloading();
void tell_stopping();
/// A sign of life, where WatchdogSec asks for one.
void tell_alive();
/// How often it wants to be told that the service is alive.
[[nodiscard]] std::optional<std::chrono::milliseconds> sign_of_life_every();

}  // namespace agreed::service_manager
