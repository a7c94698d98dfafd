#pragma once
// The split samples that are to be expected, by their true values: those seen, or a stated assumption.
#include <optional>
#include <span>
#include <vector>

namespace agreed::plan {

/// True values, in the measurand's unit; each simulated sample has one of them, all with equal chance.
class SampleValues {
 public:
  /// Such as the window's. Throws std::invalid_argument unless at least two of them differ and all are
  /// finite.
  explicit SampleValues(std::vector<double> values);
  /// 101 values, evenly from `low` to `high` > low.
  [[nodiscard]] static SampleValues evenly(double low, double high);

  [[nodiscard]] std::span<const double> values() const { return values_; }  ///< ascending
  [[nodiscard]] double lowest() const { return values_.front(); }
  [[nodiscard]] double highest() const { return values_.back(); }
  [[nodiscard]] double mean() const { return mean_; }
  [[nodiscard]] double sd() const { return sd_; }  ///< of the population: divisor is their number
  /// The chance that among `n` samples one lies at or below and one at or above `level`.
  [[nodiscard]] double chance_to_cover(double level, int n) const;

 private:
  std::vector<double> values_;
  double mean_ = 0, sd_ = 0;
};

/// What is assumed where nothing is known: samples spread evenly so that a tenth of them lies below the
/// lowest and a tenth above the highest decision level; of a single level other than 0, evenly within a tenth
/// of it either way. Nothing without levels or with the one level 0. Own assumption, no source.
[[nodiscard]] std::optional<SampleValues> around_levels(std::span<const double> decision_levels);

}  // namespace agreed::plan
