#pragma once
// What the JSON of a classical chart has of its own. Included by renderers' sources only.
#include "core/base/settings.hpp"
#include "core/chart/chart_view.hpp"
#include "daemon/render/json_parts.hpp"

namespace agreed {

/// Turns the JSON of a chart into that of a classical one: no scores, but limits with the moving range's, the
/// blocks of what was chosen, and the run length that this has.
void make_classical(Json& chart, const ChartSettings& settings, const ChartView& view);

/// The same of one point.
void add_classical(Json& point, const ClassicalPoint& classical);

}  // namespace agreed
