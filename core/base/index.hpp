#pragma once
// Positions in the lists of Settings, each with a type of its own so that an analyzer is never taken for a
// standard. The lists are sorted by id, so comparing two indexes of one kind compares their ids.
#include <compare>
#include <cstdint>
#include <functional>

namespace agreed {

template <class Tag>
struct Index {
  std::uint32_t value = 0;
  constexpr auto operator<=>(const Index&) const = default;
};

using AnalyzerIndex = Index<struct AnalyzerTag>;
using MeasurandIndex = Index<struct MeasurandTag>;
using StandardIndex = Index<struct StandardTag>;
using ChartIndex = Index<struct ChartTag>;
using ComparisonIndex = Index<struct ComparisonTag>;

}  // namespace agreed

template <class Tag>
struct std::hash<agreed::Index<Tag>> {
  std::size_t operator()(agreed::Index<Tag> index) const noexcept { return index.value; }
};
