#pragma once
// The sentences of the page about control charts. Plain text, not escaped.
#include <string>

#include "daemon/render/page_scene.hpp"

namespace agreed {

[[nodiscard]] std::string state_words(ChartState state);
[[nodiscard]] std::string signal_words(ChartSignal signal);
/// "stable. 140 readings learned, centre ..., the next reading is expected between ... and ...": one or two
/// sentences.
[[nodiscard]] std::string chart_words(const ChartScene& scene);
[[nodiscard]] std::string precision_words(const ChartScene& scene);
/// Empty without a reference value.
[[nodiscard]] std::string reference_words(const ChartScene& scene);
/// Of results that only say "below" or "above"; empty when there are none.
[[nodiscard]] std::string censored_words(const ChartScene& scene);
/// Empty without replicates.
[[nodiscard]] std::string replicates_words(const ChartScene& scene);
/// What the newest intervention did, and how far the mean is from that of the first stretch; empty without.
[[nodiscard]] std::string effects_words(const ChartScene& scene);

}  // namespace agreed
