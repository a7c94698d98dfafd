#pragma once
// The manual page agreed.yaml(5): the table of keys that validates a configuration, as prose.
#include <string>
#include <string_view>

namespace agreed::manual {

/// `example` is a complete small configuration; `date` as 2026-01-05, `version` as 0.1.0.
[[nodiscard]] std::string settings_page(std::string_view example, std::string_view date,
                                        std::string_view version);

}  // namespace agreed::manual
