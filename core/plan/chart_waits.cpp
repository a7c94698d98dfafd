#include "core/plan/chart_waits.hpp"

#include <algorithm>
#include <cmath>
#include <memory>
#include <stdexcept>
#include <vector>

#include "core/chart/chart.hpp"

namespace agreed::plan {
namespace {
constexpr int kLeastUntilCalm = 100, kUntilCalm = 10;

void require_valid(const ChartStep& step) {
  if (!(std::isfinite(step.sd) && step.sd > 0))
    throw std::invalid_argument("sd: expected a positive, finite standard deviation of one reading");
  if (!std::isfinite(step.size)) throw std::invalid_argument("size: expected a finite step");
  if (step.before < 0) throw std::invalid_argument("before: expected a number of readings, 0 or more");
}

/// That chart alone, of one lot without a reference.
std::shared_ptr<const Settings> settings_of(const Settings& all, ChartIndex index) {
  const auto alone = std::make_shared<Settings>();
  alone->site = all.site;
  alone->analyzers = all.analyzers;
  alone->measurands = all.measurands;
  alone->standards = all.standards;
  alone->charts = {all.of(index)};
  alone->charts.front().lots = {Lot{}};
  return alone;
}

/// One chart from its first reading on.
class ChartLife {
 public:
  ChartLife(const Settings& settings, double sd, RandomNormal& draw)
      : settings_(settings), sd_(sd), draw_(draw), chart_(settings, ChartIndex{0}) {
    const ChartSettings& own = settings.charts.front();
    const auto& decimals = settings.of(own.measurand).decimals;
    if (decimals) resolution_ = std::pow(10.0, -*decimals);
    // Where the level lies between two roundings matters to a coarse chart; a given centre line is the level.
    level_ = own.classical.center.value_or(resolution_ * draw.uniform());
  }

  void read(double shift) {
    const ChartSettings& own = settings_.charts.front();
    const double value = level_ + shift + sd_ * draw_();
    now_ += std::chrono::hours(1);
    findings_.clear();
    chart_.add(CheckReading{now_, own.analyzer, own.standard, own.measurand, 0, rounded(value)}, findings_);
  }
  [[nodiscard]] bool calm() const { return chart_.state() != ChartState::unstable; }

 private:
  [[nodiscard]] double rounded(double value) const {
    return resolution_ > 0 ? resolution_ * std::round(value / resolution_) : value;
  }

  const Settings& settings_;
  double sd_, level_ = 0, resolution_ = 0;
  RandomNormal& draw_;
  Chart chart_;
  Instant now_{};
  std::vector<Finding> findings_;
};

std::optional<int> wait_of(const Settings& settings, const ChartStep& step, int horizon, RandomNormal& draw) {
  ChartLife life(settings, step.sd, draw);
  for (int i = 0; i < step.before; ++i) life.read(0);
  for (int left = std::max(kLeastUntilCalm, kUntilCalm * step.before); !life.calm(); --left) {
    if (left == 0) return std::nullopt;
    life.read(0);
  }
  for (int wait = 1; wait <= horizon; ++wait) {
    life.read(step.size);
    if (!life.calm()) return wait;
  }
  return std::nullopt;
}
}  // namespace

Trial chart_trial(const Settings& settings, ChartIndex chart, const ChartStep& step) {
  require_valid(step);
  return [alone = settings_of(settings, chart), step](RandomNormal& draw, int horizon) {
    return wait_of(*alone, step, horizon, draw);
  };
}

}  // namespace agreed::plan
