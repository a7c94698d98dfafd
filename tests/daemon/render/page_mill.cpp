#include "tests/daemon/render/page_mill.hpp"

#include "daemon/render/alert_json.hpp"
#include "tests/daemon/render/page_plant.hpp"

namespace agreed::mill {
using namespace std::chrono;

Story agreeing() {
  Story out = story(310, 78, 0);
  Alert old = alert_of(11, AlertKind::check_overdue, Severity::notice, out.snapshot.at - days(3));
  old.title = "No check standard reading on line1 for 13 h";
  old.text = "wheat-low is due every 8 h.\nWhat to do next: measure wheat-low on line1.";
  old.state = AlertState::resolved;
  old.resolved_at = out.snapshot.at - days(3) + hours(1);
  old.resolved_reason = "it_came";
  out.resolved = {old};
  return out;
}

Story drifting() {
  Story out = story(400, 102, 0.27);
  const Instant at = out.snapshot.at;
  Alert lost = alert_of(17, AlertKind::agreement_lost, Severity::critical, at - days(5));
  lost.subject.comparison = "protein";
  lost.title = "Protein: line1 and line2 no longer agree";
  lost.text =
      "At 13.0 g/100 g line2 reads 0.251 g/100 g higher than line1; 0.200 is allowable.\n"
      "Likely cause: line2 moved (probability 0.97); its check standards rose by 0.25 g/100 g, those of "
      "line1 did "
      "not.\nIn doubt: 81 samples since the last shown agreement.\n"
      "What to do next: use line1 for release; check the lamp of line2 and recalibrate; record the "
      "intervention.";
  lost.started_between = Period{at - days(7), at - days(6)};
  Alert unstable = alert_of(16, AlertKind::check_standard_unstable, Severity::warning, at - days(4));
  unstable.subject.analyzer = "line2";
  unstable.subject.standard = "wheat-low";
  unstable.subject.measurand = "protein";
  unstable.title = "line2, wheat-low, protein: the level shifted up by 0.27 g/100 g";
  unstable.text = "Change score 6.2, limit 4.08.\nWhat to do next: measure wheat-low once more on line2.";
  unstable.state = AlertState::acknowledged;
  unstable.acknowledged =
      Acknowledgement{"M. Fell", at - days(3), "lamp ordered, line2 not used for release"};
  out.current = {unstable, lost};
  out.snapshot.alerts_open = 1;
  out.snapshot.alerts_acknowledged = 1;
  out.snapshot.alerts_critical = 1;
  out.snapshot.alerts_of_comparison["protein"] = 1;
  for (const char* outcome : {"done", "rejected", "repeated", "grown", ""}) {
    FileRow file;
    file.id = static_cast<std::int64_t>(out.files.size()) + 8;
    file.analyzer = "line1";
    file.name = "shift-000" + std::to_string(file.id) + ".csv";
    file.outcome = outcome;
    file.received_at = at - hours(file.id);
    file.accepted = 12;
    out.files.push_back(file);
  }
  out.files[1].reason = "value: \"abc\" is no result";
  out.files[1].accepted = 0;
  out.files[1].rejected = 1;
  out.files[1].rejected_rows = {{9, 2, 5, "check,protein,abc", out.files[1].reason}};
  return out;
}

Story empty() {
  return story(0, 0, 0);
}
Story gathering() {
  return story(13, 6, 0);
}

Story starting() {
  Story out = story(0, 0, 0);
  out.snapshot.started = out.snapshot.ready = false;
  out.snapshot.not_ready = {"64,000 of 100,000 journalled readings folded"};
  out.snapshot.charts.clear();
  out.snapshot.comparisons.clear();
  return out;
}

Story many(int count) {
  Story out = story(120, 60, 0);
  auto settings = std::make_shared<Settings>(*out.snapshot.settings);
  const auto view = out.snapshot.comparisons[1];
  settings->comparisons.clear();
  out.snapshot.comparisons.clear();
  for (int i = 0; i < count; ++i) {
    ComparisonSettings asked;
    asked.id = "protein-silo-" + std::to_string(100 + i) + "-to-packing-line-with-a-rather-long-name";
    asked.title =
        "Protein, silo " + std::to_string(100 + i) + " against the packing line in the southern hall";
    asked.measurand = {1};
    asked.x = {0};
    asked.y = {1};
    settings->comparisons.push_back(asked);
    auto copy = std::make_shared<ComparisonView>(*view);
    copy->index = {static_cast<std::uint32_t>(i)};
    if (i % 9 == 4) copy->verdict = Verdict::inconclusive;
    out.snapshot.comparisons.push_back(copy);
  }
  out.snapshot.settings = settings;
  return out;
}

Story hostile(const std::string& text) {
  Story out = drifting();
  auto settings = std::make_shared<Settings>(*out.snapshot.settings);
  settings->site = text;
  // Ids stay different from each other, as the configuration sees to.
  for (Analyzer& analyzer : settings->analyzers) analyzer = {text + analyzer.id, text};
  for (Standard& standard : settings->standards) standard = {text + standard.id, text};
  for (Measurand& measurand : settings->measurands) measurand.title = measurand.unit = text;
  for (ComparisonSettings& asked : settings->comparisons) {
    asked.title = text;
    asked.id = text + asked.id;
  }
  out.snapshot.settings = settings;
  for (auto& pointer : out.snapshot.comparisons) {
    auto view = std::make_shared<ComparisonView>(*pointer);
    for (PairView& pair : view->pairs) pair.sample = text;
    view->verdict_reason = view->fit_reason = view->error.source = view->error.reason = text;
    view->warnings = {text};
    for (LevelView& level : view->levels) level.reason = text;
    pointer = view;
  }
  for (auto& pointer : out.snapshot.charts) {
    auto view = std::make_shared<ChartView>(*pointer);
    view->lot = text;
    view->warnings = {text};
    for (StretchMark& mark : view->marks) mark.what = text;
    pointer = view;
  }
  for (AnalyzerStatus& status : out.snapshot.analyzers) status.inbox = {false, text, 3, true};
  for (Alert& alert : out.current) {
    alert.title = alert.text = alert.subject.comparison = text;
    alert.acknowledged = Acknowledgement{text, out.snapshot.at, text};
  }
  Alert resolved = out.current[0];
  resolved.id = 3;
  resolved.state = AlertState::resolved;
  resolved.resolved_reason = text;
  out.resolved = {resolved};
  out.snapshot.not_ready = {text};
  for (FileRow& file : out.files) {
    file.name = file.reason = file.analyzer = text;
    for (RejectedRow& row : file.rejected_rows) row.text = row.reason = text;
  }
  return out;
}

namespace {

AlertRecord record_of(const Alert& alert) {
  AlertRecord record{alert_json(alert, "http://mill:7480"), {}, {}};
  record.history = {{alert.id, alert.opened_at, "opened", record.body}};
  if (alert.acknowledged)
    record.history.push_back({alert.id, alert.acknowledged->at, "acknowledged", record.body});
  DeliveryRow delivery;
  delivery.message = "msg_1";
  delivery.route = "shift-leader";
  delivery.type = "agreed.alert.opened";
  delivery.state = "waiting";
  delivery.created_at = alert.opened_at;
  delivery.next_try_at = alert.opened_at + hours(1);
  delivery.tries = 3;
  delivery.last_status = 503;
  record.deliveries = {delivery};
  return record;
}

}  // namespace

std::optional<PageAnswer> ask(const Story& story, const std::string& path,
                              const std::map<std::string, std::string>& parameters, Duration late,
                              const PageVisitor& visitor) {
  PageInput input{story.snapshot, story.current, story.snapshot.at + late, "9.8.7", visitor, path, {}};
  AlertList list{{}, "open,acknowledged,resolved", "", "12"};
  for (const auto* alerts : {&story.current, &story.resolved})
    for (const Alert& alert : *alerts) {
      list.records.push_back(record_of(alert));
      if (path == "/alerts/" + std::to_string(alert.id)) return render_alert(input, list.records.back());
    }
  if (path == "/alerts") return render_alerts(input, list);
  if (path == "/files") return render_files(input, {story.files, "", "", "", "7"});
  if (path == "/sign-in") return render_sign_in(input, "/alerts");
  return render_page(path, parameters, input);
}

}  // namespace agreed::mill
