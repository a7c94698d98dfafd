#include "daemon/render/page.hpp"

#include "daemon/render/page_assets.hpp"
#include "daemon/render/page_views.hpp"

namespace agreed {
namespace {

std::optional<ComparisonIndex> find_comparison(const Settings& settings, std::string_view path) {
  constexpr std::string_view prefix = "/comparisons/";
  if (!path.starts_with(prefix)) return std::nullopt;
  path.remove_prefix(prefix.size());
  for (std::uint32_t i = 0; i < settings.comparisons.size(); ++i)
    if (settings.comparisons[i].id == path) return ComparisonIndex{i};
  return std::nullopt;
}

std::optional<ChartIndex> find_chart(const Settings& settings, std::string_view path) {
  for (std::uint32_t i = 0; i < settings.charts.size(); ++i) {
    const ChartSettings& chart = settings.charts[i];
    if ("/charts/" + settings.of(chart.analyzer).id + "/" + settings.of(chart.standard).id + "/" +
            settings.of(chart.measurand).id ==
        path)
      return ChartIndex{i};
  }
  return std::nullopt;
}

/// A page whose parameters may be wrong: then it says so and shows what it can.
template <class Contents>
PageAnswer ranged(PageInput input, const std::string& title, const PageRange& range,
                  const Contents& contents) {
  if (!range.error.empty()) input.notice = range.error;
  const bool started = input.snapshot.started;
  return document(input, title, started ? contents(input) : overview_html(input),
                  {range.error.empty() ? 200 : 400, true});
}

}  // namespace

std::optional<PageAnswer> render_page(std::string_view path,
                                      const std::map<std::string, std::string>& parameters,
                                      const PageInput& input) {
  if (path == "/page.css")
    return PageAnswer{200, "text/css; charset=utf-8", std::string(page_style_sheet()), {}};
  if (path == "/page.js")
    return PageAnswer{200, "text/javascript; charset=utf-8", std::string(page_script()), {}};
  const Snapshot& snapshot = input.snapshot;
  if (path == "/") return document(input, "Do the analyzers agree?", overview_html(input));
  if (!snapshot.settings) return std::nullopt;
  if (const auto comparison = find_comparison(*snapshot.settings, path)) {
    const PageRange range = read_range(parameters, "pairs");
    return ranged(input, comparison_scene(snapshot, *comparison).name(), range,
                  [&](const PageInput& told) { return comparison_html(told, *comparison, range); });
  }
  if (const auto chart = find_chart(*snapshot.settings, path)) {
    const PageRange range = read_range(parameters, "points");
    return ranged(input, chart_scene(snapshot, *chart).name(), range,
                  [&](const PageInput& told) { return chart_html(told, *chart, range); });
  }
  return std::nullopt;
}

PageAnswer render_words(const PageInput& input, std::string_view title, int status) {
  return document(input, title,
                  "<h1>" + escaped(title) + "</h1><p>" + link_html("/", "To the overview") + "</p>",
                  {status, false});
}

}  // namespace agreed
