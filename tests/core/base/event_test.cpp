#include "core/base/event.hpp"

#include <algorithm>
#include <random>
#include <vector>

#include <doctest/doctest.h>

using namespace agreed;

namespace {
constexpr Instant at(int s) {
  return Instant{std::chrono::seconds(s)};
}
}  // namespace

TEST_CASE("events at one moment: what was done, then what was measured, analyzer by analyzer") {
  const std::vector<Event> in_order = {CheckReading{at(1), {1}, {0}, {0}, 0, 1.0},
                                       Intervention{at(2), {1}, {}, {}, InterventionKind::repaired, ""},
                                       CheckReading{at(2), {0}, {0}, {0}, 0, 1.0},
                                       CheckReading{at(2), {0}, {0}, {0}, 1, 1.0},
                                       CheckReading{at(2), {0}, {1}, {0}, 0, 1.0},
                                       SplitReading{at(2), {0}, "a", {0}, 0, 1.0},
                                       SplitReading{at(2), {0}, "b", {0}, 0, 1.0},
                                       CheckReading{at(2), {1}, {0}, {0}, 0, 1.0},
                                       CheckReading{at(3), {0}, {0}, {0}, 0, 1.0}};
  for (std::size_t i = 0; i < in_order.size(); ++i)
    for (std::size_t j = 0; j < in_order.size(); ++j) {
      CAPTURE(i);
      CAPTURE(j);
      CHECK(happens_before(in_order[i], in_order[j]) == (i < j));
    }
}
