#pragma once
// What the journal has seen of each chart and comparison, as far as a plan rests on it. Nothing is written.
#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "config/config.hpp"

namespace agreed {

/// Of the present stretch of a chart; a point is a reading, or the mean of a run of replicates.
struct SeenChart {
  std::int64_t readings = 0;           ///< points learned
  std::optional<double> mean;          ///< in the measurand's unit; none without a reading
  std::optional<double> sd;            ///< of a point; none below two readings
  std::int64_t degrees_of_freedom = 0; ///< of that sd
  std::vector<std::string> warnings;   ///< heavy_tails, serial_correlation, ...
};

/// What the bias at a decision level is by the pairs in the window.
struct SeenBias {
  double level = 0, bias = 0, low = 0, high = 0;  ///< 90 % interval; in the measurand's unit
};

/// Of the pairs in the window of a comparison.
struct SeenComparison {
  std::int64_t pairs = 0;
  std::optional<double> sd_x, sd_y;  ///< of single results; in the measurand's unit
  std::optional<double> lambda;      ///< var(x error) / var(y error)
  std::optional<double> scatter;     ///< sd of the pairs about their line, in y; none without a fit
  double slope = 1;
  std::optional<double> true_mean, true_sd;  ///< of the samples' true values on x; none below three pairs
  std::vector<SeenBias> biases;
  std::vector<std::string> warnings;
};

struct Seen {
  bool journal = false;         ///< there is one
  std::vector<SeenChart> charts;            ///< as in the settings
  std::vector<SeenComparison> comparisons;  ///< likewise
};

/// Folds the configuration's own journal; without one nothing has been seen. Throws JournalError.
[[nodiscard]] Seen seen_in_journal(const Config& config);

}  // namespace agreed
