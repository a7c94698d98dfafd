#pragma once
// What the journal has seen of each chart and comparison, as far as a plan rests on it. Nothing is written.
#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "config/config.hpp"
#include "core/chart/repeatability.hpp"
#include "core/pair/pair.hpp"

namespace agreed::plan {

/// Of the present stretch of a chart. A point is a reading, or the mean of a run of replicates.
struct SeenChart {
  std::int64_t readings = 0;            ///< points learned
  std::optional<double> mean;           ///< none without a reading
  std::optional<double> sd;             ///< of a point; none below two readings or without any scatter
  std::int64_t degrees_of_freedom = 0;  ///< of that sd
  Repeatability repeatability;          ///< as comparisons take it
  std::vector<std::string> warnings;    ///< heavy_tails, serial_correlation, ...
};

/// The bias at a decision level, with its 90 % interval.
struct SeenBias {
  double level = 0, bias = 0, low = 0, high = 0;
};

/// Of the pairs in the window of a comparison.
struct SeenComparison {
  std::int64_t pairs = 0;
  ErrorVariance x_replicate_errors, y_replicate_errors;  ///< of single results, where replicates tell them
  double slope = 1;
  std::optional<double> scatter;           ///< sd of the pairs about their line, in y; none without a fit
  std::optional<double> expected_scatter;  ///< what repeatability alone would make of it
  std::vector<double> true_values;  ///< of the samples, on x: as measured, less what the errors spread them
  int x_replicates = 1, y_replicates = 1;  ///< results a side, the median
  std::vector<SeenBias> biases;            ///< one per decision level, with a fit
  std::vector<std::string> warnings;
};

struct Seen {
  bool journal = false;                     ///< there is one
  std::vector<SeenChart> charts;            ///< as in the settings
  std::vector<SeenComparison> comparisons;  ///< likewise
};

/// Folds the configuration's own journal; without one nothing has been seen. Throws JournalError.
[[nodiscard]] Seen seen_in_journal(const Config& config);

}  // namespace agreed::plan
