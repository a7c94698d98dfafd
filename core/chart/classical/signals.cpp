#include "core/chart/classical/signals.hpp"

namespace agreed::classical {
namespace {
constexpr ChartSignal kAll[] = {ChartSignal::above_limit,
                                ChartSignal::below_limit,
                                ChartSignal::moving_range_above_limit,
                                ChartSignal::range_above_limit,
                                ChartSignal::standard_deviation_above_limit,
                                ChartSignal::ewma,
                                ChartSignal::cusum,
                                ChartSignal::same_side,
                                ChartSignal::trend,
                                ChartSignal::two_of_three_beyond,
                                ChartSignal::four_of_five_beyond,
                                ChartSignal::alternating,
                                ChartSignal::near_centre,
                                ChartSignal::away_from_centre};
constexpr unsigned kFirstOfShift = static_cast<unsigned>(ChartSignal::ewma);
}  // namespace

std::vector<ChartSignal> Signals::all() const {
  std::vector<ChartSignal> found;
  for (const ChartSignal signal : kAll)
    if (has(signal)) found.push_back(signal);
  return found;
}

bool Signals::shift() const {
  return (bits_ >> kFirstOfShift) != 0;
}

Pattern Signals::pattern() const {
  if (has(ChartSignal::above_limit) || has(ChartSignal::below_limit)) return Pattern::single_reading;
  return shift() ? Pattern::shift : Pattern::scatter;
}

const char* to_string(Pattern pattern) {
  switch (pattern) {
    case Pattern::single_reading:
      return "single_reading";
    case Pattern::shift:
      return "shift";
    case Pattern::scatter:
      return "scatter";
  }
  return "";
}

}  // namespace agreed::classical
