#include "daemon/render/page.hpp"

#include "daemon/render/page_assets.hpp"
#include "daemon/render/page_views.hpp"

namespace agreed {
namespace {

constexpr const char* kHtml = "text/html; charset=utf-8";

PageAnswer page(const PageInput& input, std::string_view title, const std::string& main) {
  return {200, kHtml, document_html(input, title, main)};
}

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

}  // namespace

std::optional<PageAnswer> render_page(std::string_view path,
                                      const std::map<std::string, std::string>& /*query*/,
                                      const Snapshot& snapshot, std::span<const Alert> current,
                                      std::span<const Alert> resolved, Instant now,
                                      std::string_view program_version) {
  if (path == "/page.css") return PageAnswer{200, "text/css; charset=utf-8", std::string(page_style_sheet())};
  if (path == "/page.js")
    return PageAnswer{200, "text/javascript; charset=utf-8", std::string(page_script())};
  const PageInput input{snapshot, current, resolved, now, program_version};
  const bool started = snapshot.started && snapshot.settings;
  if (path == "/") return page(input, "Do the analyzers agree?", overview_html(input));
  if (path == "/alerts") return page(input, "Alerts", started ? alerts_html(input) : overview_html(input));
  if (!snapshot.settings) return std::nullopt;
  if (const auto comparison = find_comparison(*snapshot.settings, path)) {
    const std::string title = comparison_scene(snapshot, *comparison).name();
    return page(input, title, started ? comparison_html(input, *comparison) : overview_html(input));
  }
  if (const auto chart = find_chart(*snapshot.settings, path)) {
    const std::string title = chart_scene(snapshot, *chart).name();
    return page(input, title, started ? chart_html(input, *chart) : overview_html(input));
  }
  return std::nullopt;
}

}  // namespace agreed
