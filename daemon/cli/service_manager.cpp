#include "daemon/cli/service_manager.hpp"

#include <systemd/sd-daemon.h>

namespace agreed::service_manager {

void tell_ready(const std::string& status) {
  sd_notify(0, ("READY=1\nSTATUS=" + status).c_str());
}

// Both in one message: systemd takes the reload to have begun at that time of the monotonic clock, which is
// the one of steady_clock here.
void tell_reloading() {
  const auto now = std::chrono::steady_clock::now().time_since_epoch();
  const auto microseconds = std::chrono::duration_cast<std::chrono::microseconds>(now).count();
  sd_notify(0, ("RELOADING=1\nMONOTONIC_USEC=" + std::to_string(microseconds) +
                "\nSTATUS=Reading the configuration again")
                   .c_str());
}

void tell_stopping() {
  sd_notify(0, "STOPPING=1");
}

void tell_alive() {
  sd_notify(0, "WATCHDOG=1");
}

std::optional<std::chrono::milliseconds> sign_of_life_every() {
  std::uint64_t patience = 0;
  if (sd_watchdog_enabled(0, &patience) <= 0) return std::nullopt;
  return std::chrono::duration_cast<std::chrono::milliseconds>(std::chrono::microseconds(patience / 3));
}

}  // namespace agreed::service_manager
