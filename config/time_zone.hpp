#pragma once
// Which names of time zones the system knows.
#include <string>
#include <string_view>
#include <vector>

namespace agreed::settings_file {

/// True for UTC and for every zone in the system's time zone database.
[[nodiscard]] bool is_zone(std::string_view name);

/// All names in the system's time zone database, sorted; empty when it is not installed.
[[nodiscard]] const std::vector<std::string>& zone_names();

}  // namespace agreed::settings_file
