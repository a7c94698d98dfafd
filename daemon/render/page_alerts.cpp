// Alerts: one as it stands among other things, the list of them, and one with its whole record.
#include <algorithm>
#include <array>

#include "daemon/render/alert_json.hpp"
#include "daemon/render/page_figure.hpp"
#include "daemon/render/page_views.hpp"

namespace agreed {
namespace {

/// The text of an alert, a paragraph a line.
std::string paragraphs(const std::string& text) {
  std::string out;
  for (std::size_t at = 0; at < text.size();) {
    const std::size_t end = std::min(text.find('\n', at), text.size());
    if (end > at) out += "<p>" + flowing_html(std::string_view(text).substr(at, end - at)) + "</p>";
    at = end + 1;
  }
  return out;
}

std::string subject_link(const PageInput& input, const Subject& subject) {
  if (!input.snapshot.settings) return {};
  const Settings& settings = *input.snapshot.settings;
  for (const ComparisonSettings& comparison : settings.comparisons)
    if (comparison.id == subject.comparison) return link_html(comparison_path(comparison), "Its comparison");
  for (const ChartSettings& chart : settings.charts)
    if (settings.of(chart.analyzer).id == subject.analyzer &&
        settings.of(chart.standard).id == subject.standard &&
        settings.of(chart.measurand).id == subject.measurand)
      return link_html(chart_path(settings, chart), "Its chart");
  return {};
}

std::string told_since(const Alert& alert) {
  std::string out = "since " + time_html(alert.opened_at);
  if (alert.started_at || alert.started_between)
    out += "; begun " + flowing_html(beginning_words(alert.started_at, alert.started_between));
  return out;
}

std::string form_html(const PageInput& input, const std::string& id) {
  // The note may take a while to write: the script keeps what stands in a field over a refresh, by its id.
  return "<details class=\"acknowledge\" id=\"acknowledge." + id +
         "\"><summary>Acknowledge</summary><form method=\"post\" action=\"/alerts/" + id + "/acknowledge\">" +
         form_key_html(input.visitor) + R"(<input type="hidden" name="back" value=")" + escaped(input.here) +
         "\"><p><label for=\"by." + id + "\">Who acknowledges</label><input id=\"by." + id +
         R"(" name="by" required maxlength="100" autocomplete="name" value=")" + escaped(input.visitor.name) +
         "\"></p><p><label for=\"note." + id + "\">What was found or done</label><textarea id=\"note." + id +
         R"(" name="note" rows="2" maxlength="1000"></textarea></p>)" +
         "<p><button type=\"submit\">Acknowledge alert " + id + "</button></p></form></details>";
}

std::string acknowledge_html(const PageInput& input, const std::string& id) {
  const PageVisitor& visitor = input.visitor;
  if (visitor.may_act) return "<p>Not acknowledged.</p>" + form_html(input, id);
  if (visitor.signed_in)
    return "<p class=\"hint\">Not acknowledged. Acknowledging takes an operator&#39;s token; " +
           escaped(visitor.name) + " may only read.</p>";
  if (visitor.can_sign_in)
    return "<p class=\"hint\">Not acknowledged. " + sign_in_link_html(input, "Sign in to acknowledge it") +
           "</p>";
  return "<p class=\"hint\">Not acknowledged. To acknowledge it here, make a token with <code>agreed token "
         "CONFIG "
         "--role operator</code>, then " +
         sign_in_link_html(input, "sign in") + ".</p>";
}

std::string state_html(const PageInput& input, const Alert& alert) {
  std::string out;
  if (alert.acknowledged)
    out = "<p>Acknowledged by " + escaped(alert.acknowledged->by) + " " + time_html(alert.acknowledged->at) +
          (alert.acknowledged->note.empty() ? "." : ": " + escaped(alert.acknowledged->note)) + "</p>";
  if (alert.state == AlertState::resolved)
    return out + "<p>Resolved" + (alert.resolved_at ? " " + time_html(*alert.resolved_at) : std::string()) +
           (alert.resolved_reason.empty() ? "" : ": " + escaped(spaced(alert.resolved_reason))) + ".</p>";
  return alert.acknowledged ? out : acknowledge_html(input, std::to_string(alert.id));
}

/// The first paragraph says what was found; the others (since when, likely cause, what to do) are a click
/// away where there are many alerts.
std::string text_html(const Alert& alert, bool whole) {
  const std::size_t first = std::min(alert.text.find('\n'), alert.text.size());
  if (whole || first + 1 >= alert.text.size()) return paragraphs(alert.text);
  return paragraphs(alert.text.substr(0, first)) + "<details id=\"text." + std::to_string(alert.id) +
         "\"><summary>Since when, likely cause, what to do next</summary>" +
         paragraphs(alert.text.substr(first + 1)) + "</details>";
}

/// `record`: what is known of the alert besides itself.
std::string article_html(const PageInput& input, const Alert& alert, int level, const std::string& record) {
  const std::string h = "h" + std::to_string(level), id = std::to_string(alert.id);
  std::string out = std::string("<article class=\"alert ") + to_string(alert.severity) +
                    (alert.state == AlertState::resolved ? " resolved" : "") + "\" id=\"" + id + "\">";
  out += "<" + h + ">" + severity_badge_html(alert.severity) + " " + escaped(alert.title) + "</" + h + ">";
  out += "<p class=\"since\">" + told_since(alert) + "</p>";
  const std::string own = "/alerts/" + id;
  const bool alone = input.here == own;
  out += text_html(alert, alone) + state_html(input, alert);
  std::string links = subject_link(input, alert.subject);
  if (!alone) links += std::string(links.empty() ? "" : " \u00b7 ") + link_html(own, "All of alert " + id);
  return out + record + (links.empty() ? "" : "<p>" + links + "</p>") + "</article>";
}

std::string answered(const DeliveryRow& row) {
  if (row.last_status != 0) return "answered " + std::to_string(row.last_status);
  return row.last_error;
}

DataTable deliveries_table(const std::vector<DeliveryRow>& deliveries) {
  DataTable table{
      "Messages about it, and what became of them",
      {"route", "message", "state", "made", "delivered", "tries", "last answer", "next try", "id"},
      {}};
  for (const DeliveryRow& row : deliveries) {
    const auto dot = row.type.rfind('.');
    table.rows.push_back({row.route, dot == std::string::npos ? row.type : row.type.substr(dot + 1),
                          row.state, time_words(row.created_at),
                          row.delivered_at ? time_words(*row.delivered_at) : "", std::to_string(row.tries),
                          answered(row), row.next_try_at ? time_words(*row.next_try_at) : "", row.message});
  }
  return table;
}

std::string delivered_words(const std::vector<DeliveryRow>& deliveries) {
  if (deliveries.empty()) return "No message went out about it.";
  std::int64_t delivered = 0, waiting = 0, given_up = 0;
  for (const DeliveryRow& row : deliveries)
    ++(row.state == "delivered" ? delivered : row.state == "waiting" ? waiting : given_up);
  std::string out = counted(delivered, "message", "messages") + " delivered";
  if (waiting > 0) out += ", " + std::to_string(waiting) + " waiting";
  if (given_up > 0) out += ", " + std::to_string(given_up) + " given up";
  return out + ".";
}

DataTable history_table(const std::vector<StoredTransition>& history) {
  DataTable table{"What happened to it", {"at", "change", "severity", "title"}, {}};
  for (const StoredTransition& transition : history) {
    const Alert then = alert_from_json(transition.body);
    table.rows.push_back(
        {time_words(transition.at),
         transition.change +
             (transition.change == "acknowledged" && then.acknowledged ? " by " + then.acknowledged->by : ""),
         to_string(then.severity), then.title});
  }
  return table;
}

constexpr std::array<Choice, 5> kAlertChoices = {{{"open,acknowledged", "Current"},
                                                  {"open", "Not acknowledged"},
                                                  {"acknowledged", "Acknowledged"},
                                                  {"resolved", "Resolved"},
                                                  {"open,acknowledged,resolved", "All"}}};

std::string choice_html(const AlertList& list) {
  std::string out = "<nav class=\"choice\" aria-label=\"Which alerts\"><ul>";
  for (const Choice& choice : kAlertChoices)
    out +=
        choice_link(std::string("/alerts?state=") + choice.value, choice.words, list.state == choice.value);
  return out + "</ul></nav>";
}

std::string heading_of(const AlertList& list) {
  for (const Choice& choice : kAlertChoices)
    if (list.state == choice.value) return choice.words;
  return "Chosen";
}

}  // namespace

std::string alert_html(const PageInput& input, const Alert& alert, int level) {
  return article_html(input, alert, level, {});
}

std::string alerts_of_html(const PageInput& input, const Subject& subject) {
  std::string out;
  for (const Alert& alert : input.current)
    if (alert.subject.comparison == subject.comparison && alert.subject.analyzer == subject.analyzer &&
        alert.subject.standard == subject.standard && alert.subject.measurand == subject.measurand)
      out += alert_html(input, alert, 3);
  return out.empty() ? out
                     : "<section aria-label=\"Current alerts\"><h2>Current alerts</h2>" + out + "</section>";
}

PageAnswer render_alerts(const PageInput& input, const AlertList& list) {
  std::string out = "<h1>Alerts</h1>" + starting_html(input) + choice_html(list) + "<section><h2>" +
                    heading_of(list) + "</h2>";
  if (list.records.empty()) out += list.after.empty() ? "<p>None.</p>" : "<p>There are no older ones.</p>";
  for (const AlertRecord& record : list.records) {
    const Alert alert = alert_from_json(record.body);
    out += article_html(input, alert, 3, "<p>" + delivered_words(record.deliveries) + "</p>");
  }
  out += "</section>";
  std::string ways;
  const std::string of = "/alerts?state=" + path_segment(list.state);
  if (!list.after.empty()) ways += "<li>" + link_html(of, "Newest") + "</li>";
  if (!list.next.empty()) ways += "<li>" + link_html(of + "&after=" + list.next, "Older") + "</li>";
  if (!ways.empty()) out += "<nav class=\"choice\" aria-label=\"More alerts\"><ul>" + ways + "</ul></nav>";
  return document(input, "Alerts", out);
}

PageAnswer render_alert(const PageInput& input, const AlertRecord& record) {
  const Alert alert = alert_from_json(record.body);
  const std::string title = "Alert " + std::to_string(alert.id);
  std::string out = "<h1>" + title + "</h1>" + article_html(input, alert, 2, {});
  out += "<section><h2>Its record</h2>" + table_html(history_table(record.history)) + "</section>";
  out += "<section><h2>Who was told</h2><p>" + delivered_words(record.deliveries) + "</p>";
  if (!record.deliveries.empty()) out += table_html(deliveries_table(record.deliveries));
  return document(input, title, out + "</section><p>" + link_html("/alerts", "All current alerts") + "</p>");
}

}  // namespace agreed
