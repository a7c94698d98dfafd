// The overview: does it agree, since when, by how much; alerts; each comparison; each analyzer's charts.
#include <algorithm>
#include <cmath>

#include "daemon/render/page_chart_words.hpp"
#include "daemon/render/page_views.hpp"
#include "daemon/render/svg_figures.hpp"

namespace agreed {
namespace {

// With more of them only those that need a look are drawn; all are listed, each with a page of its own.
constexpr std::size_t kDrawnComparisons = 6;
constexpr std::size_t kDrawnCharts = 12;
constexpr std::size_t kListedFrom = 2;

std::string bias_cell(const ComparisonScene& scene) {
  const auto at = foremost_level(scene.view);
  if (!at) return "no bias yet";
  const LevelView& level = scene.view.levels[*at];
  const double share = std::abs(*level.bias) / *level.allowable;
  const std::string words = shown_signed(*level.bias, scene.style.decimals) + " of \u00b1" +
                            with_unit(*level.allowable, scene.style) + " at " + shortest(level.level);
  // The track is the allowable difference; a bias beyond it fills the track and says so.
  const int width = static_cast<int>(std::lround(100 * std::min(share, 1.0)));
  return "<svg class=\"share\" viewBox=\"0 0 100 8\" preserveAspectRatio=\"none\" aria-hidden=\"true\" "
         "focusable=\"false\"><rect class=\"track\" width=\"100\" height=\"8\"/><rect class=\"" +
         std::string(share > 1 ? "filled beyond" : "filled") + "\" width=\"" + std::to_string(width) +
         "\" height=\"8\"/></svg>" + escaped(words) + (share > 1 ? ", beyond it" : "");
}

/// The roles are spelled out because narrow screens show the rows as blocks, which drops those of a table.
std::string list_html(const PageInput& input) {
  const Settings& settings = *input.snapshot.settings;
  const std::string head = "<th role=\"columnheader\" scope=\"col\">", cell = "<td role=\"cell\">";
  std::string out =
      "<table role=\"table\" class=\"list\"><caption class=\"unseen\">All comparisons</caption>"
      "<thead role=\"rowgroup\"><tr role=\"row\">" +
      head + "comparison</th>" + head + "agrees?</th>" + head + "largest bias</th>" + head +
      "since</th></tr></thead><tbody role=\"rowgroup\">";
  for (std::uint32_t i = 0; i < settings.comparisons.size(); ++i) {
    const ComparisonScene scene = comparison_scene(input.snapshot, ComparisonIndex{i});
    out += "<tr role=\"row\"><th role=\"rowheader\" scope=\"row\">" +
           link_html(comparison_path(scene.asked), scene.name()) + "</th>" + cell +
           answer_badge_html(current_answer(input.snapshot, scene)) + "</td>" + cell + bias_cell(scene) +
           "</td>" + cell +
           (scene.view.verdict_since
                ? "<span class=\"narrow-only\">since </span>" + time_html(*scene.view.verdict_since)
                : std::string("no verdict yet")) +
           "</td></tr>";
  }
  return out + "</tbody></table>";
}

bool needs_a_look(const PageInput& input, const ComparisonScene& scene) {
  const auto alerts = input.snapshot.alerts_of_comparison.find(scene.asked.id);
  return scene.view.verdict == Verdict::disagreement_shown || scene.view.verdict == Verdict::inconclusive ||
         scene.view.pair_chart.state == PairChartState::unstable ||
         (alerts != input.snapshot.alerts_of_comparison.end() && alerts->second > 0);
}

std::string comparison_section(const PageInput& input, const ComparisonScene& scene, bool alone) {
  std::string out = "<section class=\"comparison\" id=\"comparison." + id_part(scene.asked.id) + "\"><h3>" +
                    link_html(comparison_path(scene.asked), scene.name()) + " <small>" + escaped(scene.x) +
                    " and " + escaped(scene.y) + "</small></h3>";
  if (!alone) out += answer_html(current_answer(input.snapshot, scene), false);
  out += "<div class=\"figures\">";
  for (std::size_t level = 0; level < scene.view.levels.size(); ++level)
    out += figure_html(bias_figure(scene, level, FigureDetail::small), 4);
  out += figure_html(pairs_figure(scene, FigureDetail::small), 4) + "</div>";
  out += "<p>" + escaped(pair_chart_words(scene)) + " " + escaped(difference_words(scene)) + "</p>";
  out += warnings_html(scene.view.warnings);
  return out + "<p>" + link_html(comparison_path(scene.asked), "All figures of " + scene.name()) +
         "</p></section>";
}

std::string comparisons_html(const PageInput& input) {
  const std::size_t count = input.snapshot.settings->comparisons.size();
  std::string out = "<section id=\"comparisons\"><h2>Comparisons</h2>";
  if (count == 0) return out + "<p>The configuration names no comparison.</p></section>";
  if (count >= kListedFrom) out += list_html(input);
  std::size_t drawn = 0;
  for (std::uint32_t i = 0; i < count && drawn < kDrawnComparisons; ++i) {
    const ComparisonScene scene = comparison_scene(input.snapshot, ComparisonIndex{i});
    if (count > kDrawnComparisons && !needs_a_look(input, scene)) continue;
    out += comparison_section(input, scene, count == 1);
    ++drawn;
  }
  if (drawn < count)
    out += "<p>Drawn here are up to " + std::to_string(kDrawnComparisons) +
           " that need a look; each name in the list leads to all its figures.</p>";
  return out + "</section>";
}

std::string inbox_html(const PageInput& input, std::size_t analyzer) {
  if (analyzer >= input.snapshot.analyzers.size()) return "<p>Nothing is known of its inbox yet.</p>";
  const AnalyzerStatus& status = input.snapshot.analyzers[analyzer];
  std::string out = "<p>";
  if (status.last_reading_at)
    out += "Newest reading " + time_html(*status.last_reading_at) + ".";
  else
    out += "No reading yet.";
  if (!status.inbox.reachable)
    out += " <strong>Its inbox cannot be reached" +
           (status.inbox.reason.empty() ? "" : ": " + escaped(status.inbox.reason)) + ".</strong>";
  if (status.inbox.pending > 0)
    out += " " + counted(static_cast<std::int64_t>(status.inbox.pending), "file", "files") + " waiting.";
  return out + "</p>";
}

std::string chart_line(const ChartScene& scene) {
  return "<li>" + chart_badge_html(scene.view.state) + " " +
         link_html(chart_path(scene.settings, scene.asked),
                   scene.standard + ", " + title_or_id(scene.measurand.title, scene.measurand.id)) +
         "</li>";
}

std::string chart_cell(const ChartScene& scene) {
  return "<div class=\"cell\"><p>" + chart_badge_html(scene.view.state) + " " +
         link_html(chart_path(scene.settings, scene.asked), "All of this chart") + "</p>" +
         figure_html(control_chart_figure(scene, FigureDetail::small), 4) + "</div>";
}

std::string analyzers_html(const PageInput& input) {
  const Settings& settings = *input.snapshot.settings;
  std::string out = "<section id=\"analyzers\"><h2>Analyzers</h2>";
  const bool all = settings.charts.size() <= kDrawnCharts;
  std::size_t drawn = 0;
  for (std::uint32_t a = 0; a < settings.analyzers.size(); ++a) {
    const Analyzer& analyzer = settings.analyzers[a];
    const bool titled = !analyzer.title.empty() && analyzer.title != analyzer.id;
    std::string cells, lines;
    for (std::uint32_t c = 0; c < settings.charts.size(); ++c) {
      if (settings.charts[c].analyzer.value != a) continue;
      const ChartScene scene = chart_scene(input.snapshot, ChartIndex{c});
      const bool draw = drawn < kDrawnCharts && (all || scene.view.state == ChartState::unstable);
      drawn += draw ? 1 : 0;
      (draw ? cells : lines) += draw ? chart_cell(scene) : chart_line(scene);
    }
    out += "<section class=\"analyzer\"><h3>" + escaped(analyzer.id) +
           (titled ? " <small>" + escaped(analyzer.title) + "</small>" : "") + "</h3>" + inbox_html(input, a);
    if (cells.empty() && lines.empty()) out += "<p>It measures no check standard.</p>";
    if (!cells.empty()) out += "<div class=\"figures\">" + cells + "</div>";
    if (!lines.empty()) out += "<ul class=\"charts\">" + lines + "</ul>";
    out += "</section>";
  }
  return out + "</section>";
}

std::string current_alerts_html(const PageInput& input) {
  std::string out = "<section id=\"alerts\"><h2>Current alerts</h2>";
  if (input.current.empty()) return out + "<p>None.</p></section>";
  std::vector<const Alert*> sorted;
  for (const Alert& alert : input.current) sorted.push_back(&alert);
  std::stable_sort(sorted.begin(), sorted.end(),
                   [](const Alert* a, const Alert* b) { return a->severity > b->severity; });
  constexpr std::size_t kShown = 8;
  out += "<div class=\"alerts\">";
  for (std::size_t i = 0; i < sorted.size() && i < kShown; ++i) out += alert_html(input, *sorted[i], 3);
  out += "</div>";
  if (sorted.size() > kShown)
    out += "<p>" + link_html("/alerts", "All " + std::to_string(sorted.size()) + " current alerts") + "</p>";
  return out + "</section>";
}

}  // namespace

std::string overview_html(const PageInput& input) {
  std::string out = "<h1>Do the analyzers agree?</h1>" + answer_html(overall_answer(input.snapshot), true);
  if (!input.snapshot.started || !input.snapshot.settings) return out;
  out += current_alerts_html(input) + comparisons_html(input) + analyzers_html(input);
  const std::string budget = budget_words(input.snapshot.settings->alarm_budget);
  return budget.empty() ? out : out + "<p>" + escaped(budget) + "</p>";
}

}  // namespace agreed
