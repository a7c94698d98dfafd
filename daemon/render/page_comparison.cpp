// All of one comparison, and all of one chart.
#include "daemon/render/chart_range.hpp"
#include "daemon/render/page_chart_words.hpp"
#include "daemon/render/page_freshness.hpp"
#include "daemon/render/page_views.hpp"
#include "daemon/render/svg_figures.hpp"

namespace agreed {
namespace {

std::string window_words(const ComparisonScene& scene) {
  const WindowView& window = scene.view.window;
  std::string out = counted(window.pairs, "pair", "pairs") + " in the window of at most " +
                    std::to_string(window.capacity > 0 ? window.capacity : scene.asked.window_pairs);
  if (window.from && window.to) out += ", from " + time_words(*window.from) + " to " + time_words(*window.to);
  out += "; " + counted(scene.view.pairs_total, "pair", "pairs") + " in all";
  if (scene.view.waiting > 0)
    out += "; " + counted(scene.view.waiting, "result waits", "results wait") + " for a partner";
  if (window.since_intervention)
    out += ". The comparison began anew at " + time_words(*window.since_intervention);
  return out + ".";
}

std::string range_words(const ComparisonScene& scene) {
  if (!scene.view.range) return {};
  const RangeView& range = *scene.view.range;
  return "Range: reliability ratio " + shown(range.reliability_ratio, 3) +
         (range.adequate ? ", adequate" : ", too narrow for a firm slope") +
         (range.covers_levels ? "; the samples cover every decision level."
                              : "; not every decision level is covered.");
}

std::string robust_words(const ComparisonScene& scene) {
  if (!scene.view.robust) return {};
  const RobustView& robust = *scene.view.robust;
  std::string out = "Second opinion by ranks (Passing and Bablok): slope " + shown(robust.slope, 4);
  if (robust.slope_interval)
    out +=
        " (" + shown(robust.slope_interval->at(0), 4) + " to " + shown(robust.slope_interval->at(1), 4) + ")";
  out += ", intercept " + shown_signed(robust.intercept, scene.style.decimals);
  if (scene.view.concordance) out += ". Concordance " + shown(*scene.view.concordance, 4);
  return out + ".";
}

std::string paragraph(const std::string& words) {
  return words.empty() ? words : "<p>" + flowing_html(words) + "</p>";
}

std::string look_back_words(const std::optional<LookBackView>& look_back) {
  if (!look_back) return {};
  std::string out =
      "In doubt: " + counted(look_back->pairs, "pair", "pairs") + " since " + time_words(look_back->from) +
      (look_back->from_agreement ? ", when agreement was last shown before the change"
                                 : ", when the data begin (agreement was never shown before the change)");
  const auto& samples = look_back->samples;
  for (std::size_t i = 0; i < samples.size(); ++i) out += (i == 0 ? "; samples " : ", ") + samples[i];
  if (static_cast<std::int64_t>(samples.size()) < look_back->pairs) out += " (the newest of them)";
  return out + ".";
}

}  // namespace

DataTable level_table(const ComparisonScene& scene) {
  DataTable table{"Decision levels, " + scene.style.unit,
                  {"level", "verdict", "bias", "90 % interval", "allowable", "single samples within",
                   "single results differ by"},
                  {}};
  const int decimals = scene.style.decimals;
  for (const LevelView& level : scene.view.levels) {
    const auto number = [&](const std::optional<double>& value) {
      return value ? shown_signed(*value, decimals) : std::string("not yet");
    };
    table.rows.push_back(
        {shortest(level.level),
         verdict_words(level.verdict) + (level.reason.empty() ? "" : ", " + spaced(level.reason)),
         number(level.bias),
         level.low && level.high ? number(level.low) + " to " + number(level.high) : "not yet",
         level.allowable ? "\u00b1" + shown(*level.allowable, decimals) : "not given",
         level.single_result ? shown_share(level.single_result->share_within) : "not yet",
         level.single_result ? number(level.single_result->low) + " to " + number(level.single_result->high)
                             : "not yet"});
  }
  return table;
}

std::string change_html(const ComparisonView& view) {
  if (!view.diagnosis) return {};
  return "<section><h2>Which one moved</h2>" + paragraph(view.diagnosis->evidence) +
         paragraph(look_back_words(view.look_back)) + "</section>";
}

std::string basis_html(const ComparisonScene& scene) {
  return paragraph(error_words(scene)) + paragraph(scatter_words(scene)) + paragraph(range_words(scene)) +
         paragraph(robust_words(scene));
}

std::string window_html(const ComparisonScene& scene) {
  return paragraph(window_words(scene)) + warnings_html(scene.view.warnings);
}

std::string comparison_html(const PageInput& input, ComparisonIndex index, const PageRange& range) {
  const ComparisonScene scene = comparison_scene(input.snapshot, index);
  Answer answer = current_answer(input.snapshot, scene);
  tell_interrupted(answer, input.snapshot);
  std::string out = "<h1>" + escaped(scene.name()) + ": do " + escaped(scene.x) + " and " + escaped(scene.y) +
                    " agree?</h1>" + answer_html(answer, true);
  Subject subject;
  subject.comparison = scene.asked.id;
  out += alerts_of_html(input, subject) + change_html(scene.view);
  out += "<section><h2>At the decision levels</h2>";
  out +=
      scene.view.levels.empty() ? paragraph("There is nothing to show yet.") : table_html(level_table(scene));
  const std::vector<Instant> times = times_of(scene.view);
  const RangeCut cut = cut_of(times, range);
  out += range_html(comparison_path(scene.asked), "pairs", "pairs", times, range, cut);
  const ComparisonView part = cut_to(scene.view, cut);
  const ComparisonScene drawn = with_view(scene, part);
  out += "<div class=\"figures broad\">";
  for (std::size_t level = 0; level < scene.view.levels.size(); ++level)
    out += figure_html(bias_figure(drawn, level, FigureDetail::full), 3);
  out += "</div></section><section><h2>The pairs</h2>" + window_html(scene) +
         "<div class=\"figures broad\">" + figure_html(pairs_figure(drawn, FigureDetail::full), 3) +
         figure_html(differences_figure(drawn, FigureDetail::full), 3) +
         figure_html(pair_chart_figure(drawn, FigureDetail::full), 3) + "</div></section>";
  return out + "<section><h2>What the figures rest on</h2>" + basis_html(scene) + "</section>";
}

std::string chart_html(const PageInput& input, ChartIndex index, const PageRange& range) {
  const ChartScene scene = chart_scene(input.snapshot, index);
  std::vector<std::string> warnings = scene.view.warnings;
  if (range_not_covered(input.snapshot, index)) warnings.emplace_back("range_not_covered");
  const Freshness fresh = freshness_of(input.snapshot, scene);
  std::string out = "<h1>" + escaped(scene.name()) + "</h1><p>" + chart_badge_html(scene.view.state) + "</p>";
  if (!fresh.words.empty())
    out += std::string("<p class=\"age") + (fresh.overdue ? " overdue" : "") + "\">" +
           flowing_html(fresh.words) + "</p>";
  out += paragraph(chart_words(scene)) + paragraph(precision_words(scene)) +
         paragraph(censored_words(scene)) + paragraph(replicates_words(scene)) +
         paragraph(reference_words(scene)) + paragraph(effects_words(scene)) + warnings_html(warnings);
  Subject subject;
  subject.analyzer = scene.analyzer;
  subject.standard = scene.standard;
  subject.measurand = scene.measurand.id;
  out += alerts_of_html(input, subject);
  const std::vector<Instant> times = times_of(scene.view);
  const RangeCut cut = cut_of(times, range);
  const ChartView part = cut_to(scene.view, cut);
  return out + "<section><h2>Readings</h2>" +
         range_html(chart_path(scene.settings, scene.asked), "points", "readings", times, range, cut) +
         "<div class=\"figures broad\">" +
         figure_html(control_chart_figure(with_view(scene, part), FigureDetail::full), 3) +
         "</div></section>";
}

}  // namespace agreed
