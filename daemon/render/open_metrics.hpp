#pragma once
// The OpenMetrics 1.0 text format (the specification of the Cloud Native Computing Foundation): families of
// samples written one after the other, with what the format demands of names, units and escapes.
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

namespace agreed {

/// What the text is served as.
inline constexpr const char* kOpenMetricsType = "application/openmetrics-text; version=1.0.0; charset=utf-8";

enum class MetricType { gauge, counter, info, state_set };

struct MetricFamily {
  std::string_view name;  ///< without the suffix that the type gives its samples (_total, _info)
  MetricType type = MetricType::gauge;
  std::string_view unit;  ///< empty, or the end of the name behind a '_'; none for info and state_set
  std::string_view help;  ///< one sentence
};

class OpenMetrics {
 public:
  using Labels = std::vector<std::pair<std::string_view, std::string>>;

  /// Samples belong to `family` from now on. Throws std::invalid_argument when the format forbids its name or
  /// unit, or when it was begun before.
  void begin(const MetricFamily& family);

  /// A value that is not there, or not finite, makes no sample. Throws std::invalid_argument for a label
  /// whose name the format forbids and for a counter below zero.
  void sample(const Labels& labels, std::optional<double> value);

  /// A sample of 1: all that an info says is in its labels.
  void info(const Labels& labels) { sample(labels, 1); }

  /// One sample for each of `states`, 1 for `current`, under a label with the family's name.
  void states(const Labels& labels, std::span<const std::string_view> states, std::string_view current);

  /// Everything, with its end mark.
  [[nodiscard]] std::string text() const { return text_ + "# EOF\n"; }

 private:
  std::string name_, suffix_;
  MetricType type_ = MetricType::gauge;
  std::vector<std::string> begun_;
  std::string text_;
};

/// `text` between the quotes of a label, or behind # HELP: backslash, quote and line end escaped.
[[nodiscard]] std::string escaped_for_metrics(std::string_view text);

}  // namespace agreed
