#include "daemon/report/report_page.hpp"

#include <algorithm>
#include <iterator>

#include "daemon/printable.hpp"
#include "daemon/render/page_assets.hpp"
#include "daemon/render/page_chart_words.hpp"
#include "daemon/render/page_range.hpp"
#include "daemon/render/page_views.hpp"
#include "daemon/render/svg_figures.hpp"

namespace agreed {
namespace {

// What differs from the pages of the service: made to be printed and kept.
constexpr std::string_view kReportStyle = R"css(
main { max-width: 62rem; }
.narrow { display: none; } .wide { display: block; }
.scroll { max-height: none; overflow: visible; }
.scroll th, .scroll td { white-space: normal; }
table { width: 100%; font-size: .82rem; }
.together figcaption { display: none; }  /* the words above say the same */
.facts th { width: 14rem; }
.sign { display: grid; grid-template-columns: 1fr 1fr; gap: 2.5rem 2rem; margin: 2.5rem 0 1rem; break-inside: avoid; }
.sign p { border-top: 1px solid var(--frame); padding-top: .2rem; color: var(--quiet); font-size: .85rem; }
@media print {
  .fresh { break-before: page; }
  h1 { font-size: 16pt; } h2 { font-size: 13pt; margin-top: 1.2rem; } h3 { font-size: 11pt; }
  table { font-size: 8pt; } th, td { padding: .12rem .5rem .12rem 0; }
  thead { display: table-header-group; }
  details { display: none; }
  .together { break-inside: avoid; } .together p { font-size: 9pt; margin: .15rem 0; max-width: none; }
  figure svg[role] { max-width: 11cm; } .wide svg[role] { max-width: none; }
  .together .wide svg[role] { max-width: 15cm; }
  .wide svg text { font-size: 17px; } .wide svg .tick, .wide svg .axis, .wide svg .side { font-size: 16px; }
  figcaption, .legend, .legend li { font-size: 8.5pt; }
}
)css";

std::string section(std::string_view heading, const std::string& contents) {
  return "<section><h2>" + escaped(heading) + "</h2>" + contents + "</section>";
}

std::string table_or(const DataTable& table, std::string_view without) {
  return table.rows.empty() ? paragraph_html(std::string(without)) : table_html(table);
}

std::string period_words(const ReportPeriod& period) {
  return time_words(period.from) + " to " + time_words(period.to);
}

std::string proof_words(const JournalProof& proof) {
  if (!proof.faults.empty())
    return "NOT as it was written: " + proof.faults.front() +
           (proof.faults.size() > 1 ? " (and " + std::to_string(proof.faults.size() - 1) + " more)" : "");
  return counted(static_cast<double>(proof.batches), "batch", "batches") + " with " +
         counted(static_cast<double>(proof.rows), "row", "rows") +
         " verified: nothing was changed and nothing is missing";
}

std::string facts_html(const PeriodRecord& record, const std::vector<std::string>& tables) {
  DataTable facts{"This record", {}, {}};
  const auto add = [&](std::string what, std::string is) {
    facts.rows.push_back({std::move(what), std::move(is)});
  };
  add("Period", period_words(record.period));
  add("Made", time_words(record.made_at) + ", agreed " + std::string(version()));
  add("Configuration", record.config_file + ", SHA-256 " + record.config_sha256);
  add("Journal", record.source);
  add("Chain", std::to_string(record.proof.head.sequence) + ":" + record.proof.head.sha256);
  add("Proof", proof_words(record.proof));
  std::string files;
  for (const std::string& name : tables) files += (files.empty() ? "" : ", ") + printable(name);
  add("Data", files);
  return "<div class=\"facts\">" + table_html(facts) + "</div>";
}

DataTable summary_table(const PeriodRecord& record) {
  DataTable table{"Comparisons",
                  {"comparison", "between", "verdict at the end", "over the period", "pairs", "alerts"},
                  {}};
  for (std::uint32_t i = 0; i < record.course.comparisons.size(); ++i) {
    const ComparisonScene scene = comparison_scene(record.snapshot, ComparisonIndex{i});
    const ComparisonCourse& course = record.course.comparisons[i];
    const auto about = std::ranges::count_if(record.alerts, [&](const AlertRecord& alert) {
      return alert_at_end(alert, record.period).then.subject.comparison == scene.asked.id;
    });
    table.rows.push_back({scene.name(), scene.x + " and " + scene.y, verdict_words(course.end.verdict),
                          verdict_shares(course), std::to_string(course.pairs.size()),
                          std::to_string(about)});
  }
  return table;
}

/// The part of the view that lies in the period. What was worked out at its end stays. Where there were more
/// pairs than a view holds, the bias is drawn with the last pair of each day.
ComparisonView of_period(const ComparisonCourse& course, const ReportPeriod& period) {
  ComparisonView view = course.end;
  std::erase_if(view.pairs, [&](const PairView& pair) { return pair.measured_at < period.from; });
  if (course.pairs.size() <= view.pairs.size()) {
    std::erase_if(view.bias_history, [&](const BiasPoint& point) { return point.at < period.from; });
    return view;
  }
  view.bias_history.clear();
  const auto day = [](Instant at) { return std::chrono::floor<std::chrono::days>(at); };
  for (const CoursePair& pair : course.pairs) {
    if (pair.levels.empty()) continue;
    auto& points = view.bias_history;
    if (!points.empty() && day(points.back().at) == day(pair.pair.measured_at)) points.pop_back();
    points.push_back({pair.pair.measured_at, pair.levels});
  }
  return view;
}

ChartView of_period(const ChartCourse& course, const ReportPeriod& period) {
  const auto times = times_of(course.end);
  const auto first =
      static_cast<std::size_t>(std::lower_bound(times.begin(), times.end(), period.from) - times.begin());
  return cut_to(course.end, {first, times.size() - first});
}

std::string comparison_section(const PeriodRecord& record, ComparisonIndex index) {
  const ComparisonScene scene = comparison_scene(record.snapshot, index);
  const ComparisonCourse& course = record.course.comparisons[index.value];
  const ComparisonView part = of_period(course, record.period);
  const ComparisonScene drawn = with_view(scene, part);
  std::string out = "<section class=\"fresh\"><h2>" + escaped(scene.name()) + ": do " + escaped(scene.x) +
                    " and " + escaped(scene.y) + " agree?</h2>";
  out += "<p>As it stood at " + time_html(record.period.to) + ":</p>" + answer_html(answer_for(scene), false);
  out += table_or(level_table(scene), "No decision levels are configured.");
  out += "<div class=\"figures broad\">" + figure_html(verdicts_figure(scene, course, record.period), 3);
  if (course.pairs.empty()) {
    out += "</div>" + paragraph_html("No pair was measured in this period.");
    return out + change_html(scene.view) + "</section>";
  }
  for (std::size_t level = 0; level < part.levels.size(); ++level)
    out += figure_html(bias_figure(drawn, level, FigureDetail::full), 3);
  out += "</div><h3>The pairs</h3>" + window_html(scene);
  if (course.pairs.size() > part.pairs.size())
    out += paragraph_html("Of " + std::to_string(course.pairs.size()) + " pairs of the period the newest " +
                          std::to_string(part.pairs.size()) +
                          " are drawn; the tables beside this page hold all.");
  out += "<div class=\"figures broad\">" + figure_html(pairs_figure(drawn, FigureDetail::full), 3) +
         figure_html(differences_figure(drawn, FigureDetail::full), 3) +
         figure_html(pair_chart_figure(drawn, FigureDetail::full), 3) + "</div>";
  out += "<h3>What the figures rest on</h3>" + basis_html(scene) + change_html(scene.view);
  return out + "<h3>Day by day</h3>" + table_html(days_table(scene, course)) + "</section>";
}

std::string chart_states(const ChartCourse& course) {
  std::string out;
  for (const ChartState state : {ChartState::stable, ChartState::unstable, ChartState::learning})
    if (const double share = share_of(course.states, state); share > 0)
      out += (out.empty() ? "" : ", ") + state_words(state) + " " + shown_share(share) + " of the time";
  return "In this period: " + out + ".";
}

std::string chart_section(const PeriodRecord& record, ChartIndex index) {
  const ChartScene scene = chart_scene(record.snapshot, index);
  const ChartCourse& course = record.course.charts[index.value];
  const ChartView part = of_period(course, record.period);
  std::string out = "<section class=\"together\"><h3>" + escaped(scene.name()) + "</h3>";
  if (course.readings == 0) return out + paragraph_html("No reading in this period.") + "</section>";
  out += paragraph_html(counted(static_cast<double>(course.readings), "reading", "readings") + ". " +
                        chart_states(course));
  out += paragraph_html("At its end: " + chart_words(scene)) + paragraph_html(precision_words(scene)) +
         paragraph_html(replicates_words(scene)) + paragraph_html(reference_words(scene)) +
         paragraph_html(effects_words(scene)) + warnings_html(scene.view.warnings);
  if (static_cast<std::size_t>(course.readings) > part.points.size() && part.points.size() >= 500)
    out += paragraph_html("The newest " + std::to_string(part.points.size()) + " are drawn.");
  return out + "<div class=\"figures broad\">" +
         figure_html(control_chart_figure(with_view(scene, part), FigureDetail::full), 4) +
         "</div></section>";
}

std::string intake_words(const PeriodRecord& record) {
  std::int64_t accepted = 0, repeated = 0, rejected = 0;
  for (const FileRow& file : record.files) {
    accepted += file.accepted;
    repeated += file.repeated;
    rejected += file.rejected;
  }
  return counted(static_cast<double>(record.files.size()), "file", "files") +
         " received: " + counted(static_cast<double>(accepted), "row", "rows") + " taken, " +
         std::to_string(repeated) + " that came before, " + std::to_string(rejected) + " rejected.";
}

std::string configurations_html(const PeriodRecord& record) {
  const auto other = [&](const RecordedConfiguration& used) { return used.sha256 != record.config_sha256; };
  std::string out =
      table_or(configurations_table(record), "The service did not run before the period's end.");
  if (std::ranges::any_of(record.configurations, other))
    out += paragraph_html(
        "Not all of them are the configuration this record was made with. Charts, fits and verdicts above "
        "show "
        "the history as that one sees it; the alerts stand as they were told then.");
  return out;
}

}  // namespace

std::string report_page(const PeriodRecord& record, const std::vector<std::string>& tables) {
  const Settings& settings = *record.snapshot.settings;
  const std::string title = "Agreement record, " + settings.site + ", " + period_words(record.period);
  std::string out =
      "<!DOCTYPE html>\n<html lang=\"en\"><head><meta charset=\"utf-8\">"
      "<meta name=\"viewport\" content=\"width=device-width, initial-scale=1\">"
      "<meta http-equiv=\"Content-Security-Policy\" content=\"default-src 'none'; style-src "
      "'unsafe-inline'\">"
      "<meta name=\"color-scheme\" content=\"light dark\"><title>" +
      escaped(title) + "</title><style>" + std::string(page_style_sheet()) + std::string(kReportStyle) +
      "</style></head><body><main>";
  out += "<h1>Agreement record: " + escaped(settings.site) + "</h1><p>" +
         flowing_html(period_words(record.period)) + "</p>";
  if (record.empty()) out += "<p class=\"notice\">Nothing was measured or received in this period.</p>";
  out += facts_html(record, tables) +
         section("Summary", table_or(summary_table(record), "No comparison is configured."));
  out += section("Alerts", table_or(alerts_table(record), "No alert was open in this period."));
  out += section("Interventions",
                 table_or(interventions_table(record), "No intervention was told of in this period."));
  for (std::uint32_t i = 0; i < record.course.comparisons.size(); ++i)
    out += comparison_section(record, ComparisonIndex{i});
  std::string charts;
  for (std::uint32_t i = 0; i < record.course.charts.size(); ++i)
    charts += chart_section(record, ChartIndex{i});
  out += "<section class=\"fresh\"><h2>Check standards</h2>" +
         (charts.empty() ? paragraph_html("None are configured.") : charts) + "</section>";
  out += section("What was received",
                 paragraph_html(intake_words(record)) +
                     table_or(rejected_files_table(record), "No row was rejected.") +
                     (record.rejected.empty() ? "" : table_html(rejected_rows_table(record))));
  out += section("Configurations", configurations_html(record));
  out += "<div class=\"sign\"><p>Prepared by, date</p><p>Reviewed by, date</p></div></main>";
  return out +
         "<footer><p>Figures are of results measured in the period, alerts and files of what happened in it "
         "by the "
         "service's clock. Everything is computed from what the journal held when this was made, corrections "
         "and late results included. Numbers of alerts, files and rows are those of the journal and of the "
         "HTTP "
         "interface. Times are in UTC.</p><p>" +
         std::string(kCautions) + "</p></footer></body></html>\n";
}

}  // namespace agreed
