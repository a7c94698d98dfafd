#pragma once
// agreed example: a working configuration and a day's drop files, as they would come from Harrow Mill.
#include <filesystem>

namespace agreed {

/// Writes into `folder`, which must not exist or be empty; the exit code.
int write_example(const std::filesystem::path& folder);

}  // namespace agreed
