#pragma once
// Normal deviates from an explicit seed: the same ones on every machine, so that what is simulated from them
// is a pure function. Splitmix64 (Steele, Lea and Flood, OOPSLA 2014) and Marsaglia's polar method (Marsaglia
// and Bray, SIAM Review 6 (1964) 260).
#include <cmath>
#include <cstdint>

namespace agreed {

class RandomNormal {
 public:
  explicit RandomNormal(std::uint64_t seed) : state_(seed) {}

  /// The `trial`-th of the streams that belong to a seed: a trial draws the same numbers however many the
  /// trials before it took.
  RandomNormal(std::uint64_t seed, std::uint64_t trial) : state_(mixed(mixed(seed) + trial)) {}

  /// Uniform on (0, 1).
  double uniform() { return (static_cast<double>(bits() >> 11) + 0.5) * 0x1p-53; }

  double operator()() {
    if (has_spare_) {
      has_spare_ = false;
      return spare_;
    }
    double u = 0, v = 0, square = 0;
    do {
      u = 2 * uniform() - 1;
      v = 2 * uniform() - 1;
      square = u * u + v * v;
    } while (!(square < 1 && square > 0));
    const double factor = std::sqrt(-2 * std::log(square) / square);
    spare_ = v * factor;
    has_spare_ = true;
    return u * factor;
  }

  /// Chi-squared on `degrees` > 0 (Marsaglia and Tsang, ACM Trans. Math. Softw. 26 (2000) 363).
  double chi_squared(double degrees) {
    const double shape = degrees / 2;
    const double raised = shape < 1 ? shape + 1 : shape, d = raised - 1.0 / 3, c = 1 / std::sqrt(9 * d);
    for (;;) {
      const double z = (*this)(), t = 1 + c * z;
      if (!(t > 0)) continue;
      const double cube = t * t * t;
      if (std::log(uniform()) < z * z / 2 + d - d * cube + d * std::log(cube))
        return 2 * d * cube * (shape < 1 ? std::pow(uniform(), 1 / shape) : 1);
    }
  }

 private:
  static std::uint64_t mixed(std::uint64_t z) {
    z = (z ^ (z >> 30)) * 0xbf58476d1ce4e5b9U;
    z = (z ^ (z >> 27)) * 0x94d049bb133111ebU;
    return z ^ (z >> 31);
  }

  std::uint64_t bits() {
    state_ += 0x9e3779b97f4a7c15U;
    return mixed(state_);
  }

  std::uint64_t state_;
  bool has_spare_ = false;
  double spare_ = 0;
};

}  // namespace agreed
