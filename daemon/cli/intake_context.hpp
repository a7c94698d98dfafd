#pragma once
// What the commands that read drop files beside the service must know of an analyzer.
#include <cstddef>

#include "config/config.hpp"
#include "daemon/intake/row_maker.hpp"

namespace agreed {

/// To read files of the analyzer at this position as the service would now; `config` outlives it.
[[nodiscard]] PlainContext context_of(const Config& config, std::size_t analyzer);

/// Why a file of that name would not be taken; empty if it would.
[[nodiscard]] std::string name_fault(const IntakeSettings& intake, const std::string& name);

}  // namespace agreed
