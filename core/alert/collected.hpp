#pragma once
// Kinds that have no condition which could cease: something happened, and it stays so until a person has seen
// it. They resolve on acknowledgement, and until then further happenings are collected in the open alert.
#include <cstddef>

#include "core/base/finding.hpp"

namespace agreed {

/// Newest entries that an alert lists; `count` goes on beyond.
inline constexpr std::size_t kMostCollected = 1000;

/// pair_outlier, file_rejected, readings_conflict, unpaired_samples.
[[nodiscard]] bool resolves_on_acknowledgement(AlertKind kind);

/// The name of the list that such a kind collects in: samples, files or items; "" for other kinds.
[[nodiscard]] const char* collected_list(AlertKind kind);

/// Details of the alert after one more happening: those of the newest one, its entry (`sample`, `file` or
/// `item`, and what it lists itself) moved to the end of the list, each name once, and `count` = happenings.
/// `before` empty: the first one.
[[nodiscard]] Details collect(AlertKind kind, const Details& before, const Details& newest);

}  // namespace agreed
