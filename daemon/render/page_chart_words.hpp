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

}  // namespace agreed
