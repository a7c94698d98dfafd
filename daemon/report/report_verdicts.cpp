// The verdict of a comparison over a period: how long which one held, and the bias day by day.
#include <algorithm>

#include "daemon/render/page_words.hpp"
#include "daemon/render/svg_figures.hpp"
#include "daemon/render/svg_plot.hpp"
#include "daemon/report/report_page.hpp"

namespace agreed {
namespace {

constexpr double kShownAt = 3, kUndecidedAt = 2, kLostAt = 1;

double height_of(Verdict verdict) {
  if (verdict == Verdict::agreement_shown) return kShownAt;
  return verdict == Verdict::disagreement_shown ? kLostAt : kUndecidedAt;
}

std::string draw_verdicts(const ComparisonCourse& course, const ReportPeriod& period, const Figure& figure,
                          const std::string& id, FigureSize size) {
  Plot plot(id, size, {on_axis(period.from), on_axis(period.to)}, {0.5, 3.5}, 120);
  plot.across(kShownAt, "grid", "agreement shown");
  plot.across(kUndecidedAt, "grid", "not decided");
  plot.across(kLostAt, "grid", "disagreement");
  std::vector<PlotPoint> steps;
  for (const Spell<Verdict>& spell : course.verdicts) {
    steps.push_back({on_axis(spell.from), height_of(spell.state)});
    steps.push_back({on_axis(spell.to), height_of(spell.state)});
  }
  plot.line(steps, "trend");
  plot.time_axis_x();
  return plot.svg(figure.heading, figure.summary);
}

std::string day_of(Instant at) {
  return to_rfc3339(at).substr(0, 10);
}

std::string interval_text(const std::array<double, 3>& level, int decimals) {
  return shown_signed(level[0], decimals) + " (" + shown_signed(level[1], decimals) + " to " +
         shown_signed(level[2], decimals) + ")";
}

}  // namespace

std::string verdict_shares(const ComparisonCourse& course) {
  std::string out;
  for (const Verdict verdict :
       {Verdict::agreement_shown, Verdict::disagreement_shown, Verdict::inconclusive, Verdict::gathering})
    if (const double share = share_of(course.verdicts, verdict); share > 0)
      out += (out.empty() ? "" : ", ") + verdict_words(verdict) + " " + shown_share(share) + " of the time";
  return out;
}

Figure verdicts_figure(const ComparisonScene& scene, const ComparisonCourse& course,
                       const ReportPeriod& period) {
  Figure figure;
  figure.id = "verdicts." + id_part(scene.asked.id);
  figure.heading = "The verdict over the period";
  figure.summary = "In this period: " + verdict_shares(course) + ".";
  figure.drawing = draw_verdicts(course, period, figure, figure.id, {360, 150});
  figure.wide = draw_verdicts(course, period, figure, figure.id + ".wide", {960, 150});
  figure.table = verdicts_table(course);
  return figure;
}

DataTable verdicts_table(const ComparisonCourse& course) {
  DataTable table{"Verdicts, oldest first", {"from", "to", "verdict", "for"}, {}};
  for (const Spell<Verdict>& spell : course.verdicts)
    table.rows.push_back({time_words(spell.from), time_words(spell.to), verdict_words(spell.state),
                          shown_span(spell.to - spell.from)});
  return table;
}

DataTable days_table(const ComparisonScene& scene, const ComparisonCourse& course) {
  DataTable table{
      "Day by day, with the last pair of each day, " + scene.style.unit, {"day", "pairs", "verdict"}, {}};
  for (const LevelView& level : course.end.levels)
    table.heads.push_back("bias at " + shortest(level.level) + " (90 % interval)");
  std::size_t pairs = 0;
  for (std::size_t i = 0; i < course.pairs.size(); ++i) {
    const CoursePair& last = course.pairs[i];
    const std::string day = day_of(last.pair.measured_at);
    ++pairs;
    if (i + 1 < course.pairs.size() && day_of(course.pairs[i + 1].pair.measured_at) == day) continue;
    std::vector<std::string> row{day, std::to_string(pairs), verdict_words(last.verdict)};
    for (std::size_t level = 0; level < course.end.levels.size(); ++level)
      row.push_back(level < last.levels.size() ? interval_text(last.levels[level], scene.style.decimals)
                                               : "not yet");
    table.rows.push_back(std::move(row));
    pairs = 0;
  }
  return table;
}

}  // namespace agreed
