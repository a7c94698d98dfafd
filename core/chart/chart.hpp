#pragma once
// One control chart as a fold: readings and interventions in, findings out.
#include <memory>
#include <optional>
#include <span>
#include <vector>

#include "core/base/event.hpp"
#include "core/base/finding.hpp"
#include "core/base/settings.hpp"
#include "core/chart/chart_view.hpp"
#include "core/chart/check_point.hpp"
#include "core/chart/repeatability.hpp"

namespace agreed {

class Chart {
 public:
  /// `settings` outlives the chart.
  Chart(const Settings& settings, ChartIndex index);
  ~Chart();
  Chart(Chart&&) noexcept;
  Chart& operator=(Chart&&) noexcept;
  Chart(const Chart&);
  Chart& operator=(const Chart&);

  /// Takes the next run: one or more readings of one time, later than those of any run before it and not
  /// earlier than any intervention. A run is one point, its mean; so all its replicates must be known, and
  /// one that comes afterwards is for the caller to fold the chart again. Appends what it leads to.
  void add(std::span<const CheckReading> run, std::vector<Finding>& findings);

  /// A run of one.
  void add(const CheckReading& reading, std::vector<Finding>& findings) {
    add(std::span(&reading, 1), findings);
  }

  /// Takes an intervention on this chart's analyzer, not earlier than anything before it. One that does not
  /// concern this chart (another standard or measurand, `noted`) changes nothing.
  void add(const Intervention& intervention, std::vector<Finding>& findings);

  /// The time of the newest event folded.
  [[nodiscard]] std::optional<Instant> last_at() const;

  /// Repeatability as it stands now.
  [[nodiscard]] Repeatability repeatability() const;

  /// Repeatability as it stood at `at` (after every event not later). Nothing if that is older than the
  /// points kept (the newest 500) although older ones were folded; not known() if there was none yet.
  [[nodiscard]] std::optional<Repeatability> repeatability_at(Instant at) const;

  /// Appends the findings that hold now, as if just made: what the alert book is compared with after a fold.
  void conditions(std::vector<Finding>& findings) const;

  /// The newest 500 readings, oldest first, those set aside among them.
  [[nodiscard]] std::vector<CheckPoint> readings() const;

  [[nodiscard]] ChartState state() const;
  [[nodiscard]] ChartView view() const;

 private:
  struct State;
  std::unique_ptr<State> state_;
};

}  // namespace agreed
