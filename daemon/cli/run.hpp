#pragma once
// agreed run: the composition root of the service.
#include <filesystem>

namespace agreed {

/// Runs until SIGTERM or SIGINT; the exit code.
int run_service(const std::filesystem::path& config);

}  // namespace agreed
