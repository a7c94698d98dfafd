#include "core/pair/concordance.hpp"

namespace agreed {

std::optional<double> concordance(const Moments& moments) {
  if (moments.n < 2) return std::nullopt;
  const double difference = moments.mean_difference();
  const double whole = (moments.sxx + moments.syy) / moments.n + difference * difference;
  if (!(whole > 0)) return std::nullopt;
  return 2 * (moments.sxy / moments.n) / whole;
}

}  // namespace agreed
