#pragma once
// Why a file that the configuration names cannot be read: a file that is missing and one that is kept from us
// need different help.
#include <filesystem>
#include <string>

namespace agreed {

/// Empty if `file` is a regular file that this process may read. Else the reason in words that name the file:
/// it is missing, no file (a pipe is not waited at), or permission is denied, and where (who_may_not).
[[nodiscard]] std::string why_unreadable(const std::filesystem::path& file);

/// For a path at which permission is denied, who lacks which: "user agreed may not search the folder
/// /etc/agreed/secrets on the way to /etc/agreed/secrets/hook", the first such folder, or "user agreed may
/// not read /etc/agreed/secrets/hook".
[[nodiscard]] std::string who_may_not(const std::filesystem::path& path);

}  // namespace agreed
