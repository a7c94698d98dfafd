#pragma once
// A check reading as a chart remembers it, for who asks what the standard did at some moment.
#include "core/base/instant.hpp"

namespace agreed {

struct CheckPoint {
  Instant at{};
  double value = 0;
  bool set_aside = false;
  bool starts_stretch = false;  ///< first reading after an intervention or of a new lot
};

}  // namespace agreed
