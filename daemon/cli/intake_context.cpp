#include "daemon/cli/intake_context.hpp"

#include <memory>

#include "daemon/clock.hpp"
#include "daemon/intake/file_names.hpp"

namespace agreed {

PlainContext context_of(const Config& config, std::size_t analyzer) {
  const IntakeSettings& intake = config.intake[analyzer];
  const AnalyzerIndex index{static_cast<std::uint32_t>(analyzer)};
  return {*config.settings,
          index,
          standards_of(*config.settings, index),
          std::make_shared<LocalZone>(intake.zone),
          intake.not_before,
          now_utc(),
          intake.mapped};
}

std::string name_fault(const IntakeSettings& intake, const std::string& name) {
  if (is_ignored_name(name)) return "a file of that name is taken for work in progress and left where it is";
  if (intake.mapped && !is_wanted_name(intake.mapped->files, name))
    return "format " + intake.format + " does not take files of that name (files, ignore)";
  return "";
}

}  // namespace agreed
