#include "core/pair/outlier.hpp"

#include <algorithm>
#include <cmath>
#include <iterator>

namespace agreed {
namespace {
// Moves the pairs that match out of the list, in their order.
template <class Match>
std::vector<HeldPair> take(std::vector<HeldPair>& from, Match match) {
  const auto rest =
      std::stable_partition(from.begin(), from.end(), [&](const HeldPair& h) { return !match(h); });
  std::vector<HeldPair> taken(std::make_move_iterator(rest), std::make_move_iterator(from.end()));
  from.erase(rest, from.end());
  return taken;
}
}  // namespace

OutlierPolicy::OutlierPolicy(double run_length)
    : active_(run_length > 1), limits_(active_ ? 0.5 / run_length : 0.5) {}

bool OutlierPolicy::flags(double residual, int df) {
  return active_ && df >= 1 && std::abs(residual) > limits_.at(df);
}

std::vector<HeldPair> OutlierPolicy::admit_or_hold(const HeldPair& flagged) {
  auto admitted = take(held_, [&](const HeldPair& h) { return (h.residual > 0) == (flagged.residual > 0); });
  if (admitted.empty()) held_.push_back(flagged);
  return admitted;
}

std::vector<HeldPair> OutlierPolicy::give_up(std::int64_t serial_of_next) {
  for (HeldPair& held : held_)
    if (held.serial < serial_of_next) --held.chances;
  return take(held_, [](const HeldPair& h) { return h.chances <= 0; });
}

std::vector<HeldPair> OutlierPolicy::give_up_all() {
  return take(held_, [](const HeldPair&) { return true; });
}

void OutlierPolicy::accepted(std::int64_t serial) {
  for (HeldPair& held : held_)
    if (held.serial < serial) ++held.accepted_later;
}

}  // namespace agreed
