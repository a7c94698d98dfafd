#include "daemon/plan/expected.hpp"

#include <algorithm>
#include <cmath>
#include <utility>
#include <vector>

#include "core/pair/error_ratio.hpp"

namespace agreed::plan {
namespace {

constexpr double kDegreesToTrust = 5;
constexpr std::int64_t kPairsToTrust = 20;
constexpr double kExactly = 1e6;  // degrees of freedom of an sd that was given

/// One comparison as it is worked out.
class Expectation {
 public:
  Expectation(const Settings& settings, ComparisonIndex index, const Wishes& wishes, const Seen& seen)
      : settings_(settings),
        comparison_(settings.of(index)),
        wishes_(wishes),
        all_seen_(seen),
        seen_(seen.comparisons.at(index.value)) {}

  ExpectedPairs work_out() {
    ExpectedPairs expected;
    ErrorRatio ratio = ratio_in_service();
    find_sds(ratio, expected);
    if (expected.x.source == Source::unknown || expected.y.source == Source::unknown) {
      expected.missing = missing(expected);
      return expected;
    }
    if (!ratio.known) ratio = ratio_of(exactly(expected.x.value), exactly(expected.y.value));
    scale_to_scatter(expected);
    const auto seen = samples_seen();
    expected.samples_seen = seen.has_value();
    expected.conditions = PairConditions{seen ? *seen : samples_assumed(expected),
                                         expected.x.value,
                                         expected.y.value,
                                         ratio,
                                         seen_.x_replicates,
                                         seen_.y_replicates};
    return expected;
  }

 private:
  [[nodiscard]] std::optional<double> given(AnalyzerIndex analyzer) const {
    return wishes_.sd_of(analyzer, comparison_.measurand);
  }
  static ErrorVariance exactly(double sd) { return {sd * sd, kExactly}; }

  /// What the check standards of an analyzer tell; of an sd that was given, as if one told just that.
  [[nodiscard]] std::vector<Repeatability> standards_of(AnalyzerIndex analyzer) const {
    std::vector<Repeatability> standards;
    for (std::size_t i = 0; i < settings_.charts.size(); ++i) {
      const ChartSettings& chart = settings_.charts[i];
      if (chart.analyzer != analyzer || chart.measurand != comparison_.measurand) continue;
      Repeatability known = all_seen_.charts[i].repeatability;
      const auto sd = given(analyzer);
      if (sd) {
        known.variance = *sd * *sd;
        known.degrees_of_freedom = kExactly;
      }
      if (sd && all_seen_.charts[i].readings == 0) known.mean = middle();
      standards.push_back(known);
    }
    if (const auto sd = given(analyzer); sd && standards.empty())
      standards.push_back({.variance = *sd * *sd, .degrees_of_freedom = kExactly, .mean = middle()});
    return standards;
  }

  /// lambda as the comparison would take it with each pair.
  [[nodiscard]] ErrorRatio ratio_in_service() const {
    const ErrorRatioSettings& source = comparison_.error_ratio;
    if (source.source == ErrorSource::given_lambda || source.source == ErrorSource::given_sds)
      return given_ratio(source, comparison_.error_growth);
    if (source.source == ErrorSource::replicates)
      return ratio_of(seen_.x_replicate_errors, seen_.y_replicate_errors);
    const auto x = standards_of(comparison_.x), y = standards_of(comparison_.y);
    if (std::min(most_degrees(x), most_degrees(y)) < kDegreesToTrust) return {};
    ErrorRatio ratio = ratio_from_standards(x, y, comparison_.error_growth, "", "", "");
    return ratio.known ? ratio : ratio_of(pooled(x), pooled(y));
  }

  static double most_degrees(const std::vector<Repeatability>& standards) {
    double most = 0;
    for (const Repeatability& one : standards)
      if (one.variance > 0) most = std::max(most, one.degrees_of_freedom);
    return most;
  }

  /// The level at which sds are stated: the middle of the samples.
  [[nodiscard]] double middle() const {
    if (const auto seen = samples_seen()) return seen->mean();
    const auto& levels = settings_.of(comparison_.measurand).decision_levels;
    if (levels.empty()) return 0;
    return (*std::ranges::min_element(levels) + *std::ranges::max_element(levels)) / 2;
  }

  void find_sds(const ErrorRatio& ratio, ExpectedPairs& expected) const {
    const bool configured = comparison_.error_ratio.source == ErrorSource::given_sds;
    if (ratio.known && ratio.variances_known) {
      const double at = middle();
      const bool grows = ratio.growth() != ErrorGrowth::constant;
      const auto side = [&](const ErrorVariance& variance, const ErrorModel& model) {
        const double squared = grows ? model.variance_at(at) : variance.variance;
        return ExpectedSd{configured ? Source::configured : Source::seen, std::sqrt(squared),
                          configured ? 0 : variance.degrees_of_freedom};
      };
      expected.x = side(ratio.x, ratio.x_model);
      expected.y = side(ratio.y, ratio.y_model);
    } else if (ratio.known && seen_.scatter && seen_.pairs >= kPairsToTrust) {
      // A bare lambda: how large the errors are is told by the pairs alone.
      const double of_y = *seen_.scatter / std::sqrt(1 + seen_.slope * seen_.slope * ratio.lambda);
      expected.y = {Source::seen, of_y, static_cast<double>(seen_.pairs - 2)};
      expected.x = {Source::seen, of_y * std::sqrt(ratio.lambda), static_cast<double>(seen_.pairs - 2)};
    } else {
      find_from_standards(expected);
    }
    if (const auto sd = given(comparison_.x)) expected.x = {Source::given, *sd, 0};
    if (const auto sd = given(comparison_.y)) expected.y = {Source::given, *sd, 0};
  }

  /// Each side for itself, when there is no ratio: the other may be given.
  void find_from_standards(ExpectedPairs& expected) const {
    for (auto [analyzer, sd] :
         {std::pair(comparison_.x, &expected.x), std::pair(comparison_.y, &expected.y)}) {
      const ErrorVariance known = pooled(standards_of(analyzer));
      if (known.variance > 0 && known.degrees_of_freedom >= kDegreesToTrust)
        *sd = {Source::seen, std::sqrt(known.variance), known.degrees_of_freedom};
    }
  }

  void scale_to_scatter(ExpectedPairs& expected) const {
    if (expected.x.source != Source::seen || expected.y.source != Source::seen) return;
    if (!seen_.scatter || !seen_.expected_scatter || seen_.pairs < kPairsToTrust) return;
    const double factor = *seen_.scatter / *seen_.expected_scatter;
    expected.x.value *= factor;
    expected.y.value *= factor;
    expected.scatter_seen = true;
  }

  [[nodiscard]] std::optional<SampleValues> samples_seen() const {
    if (seen_.pairs < kPairsToTrust || seen_.true_values.empty()) return std::nullopt;
    const auto [low, high] = std::ranges::minmax(seen_.true_values);
    return low < high ? std::optional(SampleValues(seen_.true_values)) : std::nullopt;
  }

  [[nodiscard]] SampleValues samples_assumed(const ExpectedPairs& expected) const {
    if (const auto around = around_levels(settings_.of(comparison_.measurand).decision_levels))
      return *around;
    constexpr double kSds = 50;  // a range that is no worry to the fit
    return SampleValues::evenly(0, kSds * std::hypot(expected.x.value, expected.y.value));
  }

  [[nodiscard]] std::string missing(const ExpectedPairs& expected) const {
    std::string text;
    const std::string& measurand = settings_.of(comparison_.measurand).id;
    for (const auto& [analyzer, sd] :
         {std::pair(comparison_.x, expected.x), std::pair(comparison_.y, expected.y)})
      if (sd.source == Source::unknown)
        text += (text.empty() ? "" : " and ") + settings_.of(analyzer).id + "/" + measurand;
    return text;
  }

  const Settings& settings_;
  const ComparisonSettings& comparison_;
  const Wishes& wishes_;
  const Seen& all_seen_;
  const SeenComparison& seen_;
};

}  // namespace

const char* to_string(Source source) {
  switch (source) {
    case Source::unknown:
      return "unknown";
    case Source::given:
      return "given";
    case Source::configured:
      return "configured";
    case Source::seen:
      return "seen";
  }
  return "";
}

ExpectedSd expected_sd(const Settings& settings, ChartIndex chart, const Wishes& wishes, const Seen& seen) {
  const ChartSettings& of = settings.of(chart);
  if (const auto sd = wishes.sd_of(of.analyzer, of.measurand)) return {Source::given, *sd, 0};
  const SeenChart& known = seen.charts.at(chart.value);
  if (known.sd && static_cast<double>(known.degrees_of_freedom) >= kDegreesToTrust)
    return {Source::seen, *known.sd, static_cast<double>(known.degrees_of_freedom)};
  if (of.classical.sigma) return {Source::configured, *of.classical.sigma, 0};
  return {};
}

ExpectedPairs expected_pairs(const Settings& settings, ComparisonIndex comparison, const Wishes& wishes,
                             const Seen& seen) {
  return Expectation(settings, comparison, wishes, seen).work_out();
}

}  // namespace agreed::plan
