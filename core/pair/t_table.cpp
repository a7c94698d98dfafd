#include "core/pair/t_table.hpp"

#include <limits>

#include "core/base/distributions.hpp"

namespace agreed {
namespace {
constexpr double kUnknown = -std::numeric_limits<double>::max();
}

double TTable::at(int df) {
  const auto index = static_cast<std::size_t>(df);
  if (index >= known_.size()) known_.resize(index + 1, kUnknown);
  double& t = known_[index];
  if (t <= kUnknown) t = t_quantile_of_tail(tail_, df);
  return t;
}

}  // namespace agreed
