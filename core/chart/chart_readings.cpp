#include "core/chart/chart_state.hpp"

namespace agreed {

std::vector<CheckPoint> Chart::readings() const {
  std::vector<CheckPoint> readings;
  readings.reserve(state_->points.size());
  for (const PointRecord& point : state_->points.all())
    readings.push_back({point.at, point.value, point.set_aside, point.starts_stretch});
  return readings;
}

}  // namespace agreed
