#pragma once
// Whether a folder lies on a mounted share, or is what is left when the share is not mounted. Told by device
// numbers, not by the kernel's list of mounts: a service's own view of the files (systemd) has mounts of
// folders onto themselves there, which say nothing about shares.
#include <filesystem>
#include <optional>

namespace agreed {

/// How many folders above the open folder its file system begins: 0 if it is mounted at the folder itself, 1
/// if at its parent, ... Nothing if that cannot be found out.
[[nodiscard]] std::optional<int> levels_below_mount(int folder);

/// The mount point that `table` (fstab(5)) has for the path of the open folder, at it or above it, if nothing
/// is mounted there. Nothing also if the table names none for that path or cannot be read. Its root, and
/// folders of this machine mounted elsewhere (bind), do not count.
[[nodiscard]] std::optional<std::filesystem::path> missing_mount(int folder,
                                                                 const std::filesystem::path& table);

}  // namespace agreed
