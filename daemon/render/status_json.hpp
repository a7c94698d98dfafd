#pragma once
// GET /api/status: the whole picture, small.
#include <string>

#include "daemon/engine/snapshot.hpp"

namespace agreed {

/// The worst that is to be told, in one word: `starting` until the service is ready; `alert` with an open
/// critical alert or a verdict disagreement_shown; `attention` with any open alert, a verdict gathering, or
/// one inconclusive for longer than its prove_within; else `ok`.
[[nodiscard]] const char* overall(const Snapshot& snapshot);

/// {"sequence":..,"sha256":".."}, as in the status and in signs of life.
[[nodiscard]] std::string chain_json(const ChainHead& head);

/// Renders the status as JSON. Times are those of the snapshot, so equal snapshots give equal bytes.
[[nodiscard]] std::string status_json(const Snapshot& snapshot);

}  // namespace agreed
