#pragma once
// GET /api/files: the files that came in and what became of them.
#include <optional>
#include <string>
#include <vector>

#include "daemon/journal/journal.hpp"

namespace agreed {

/// {"files":[...],"next":...}: `next` is the cursor of the following page, null on the last one. `outcome`
/// and `committed_at` are null while a file is being taken in. Bytes of names and cells that are not clean
/// text are written as \xNN.
[[nodiscard]] std::string files_json(const std::vector<FileRow>& files,
                                     const std::optional<std::string>& next);

}  // namespace agreed
