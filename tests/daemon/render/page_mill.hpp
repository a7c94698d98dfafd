#pragma once
// Invented snapshots of Harrow Mill for the tests of the page and its preview. The figures are drawn from a
// seeded generator and worked out by simple means; they look right and prove nothing.
#include <string>
#include <vector>

#include "core/alert/alert.hpp"
#include "daemon/engine/snapshot.hpp"

namespace agreed::mill {

struct Story {
  Snapshot snapshot;
  std::vector<Alert> current, resolved;
};

[[nodiscard]] Story agreeing();
/// Week five: line2's lamp is worn, protein has drifted upward, alerts are open.
[[nodiscard]] Story drifting();
/// Everything configured, nothing measured.
[[nodiscard]] Story empty();
/// The first two days: charts learn, comparisons gather.
[[nodiscard]] Story gathering();
[[nodiscard]] Story starting();
/// `count` comparisons with long names.
[[nodiscard]] Story many(int count);
/// Every text that others write carries markup.
[[nodiscard]] Story hostile(const std::string& text);

}  // namespace agreed::mill
