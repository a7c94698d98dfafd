// What the pages share: answers, badges, alerts.
#include <algorithm>

#include "daemon/render/page_chart_words.hpp"
#include "daemon/render/page_views.hpp"

namespace agreed {
namespace {

std::string icon(std::string_view inside) {
  return "<svg class=\"icon\" viewBox=\"0 0 24 24\" aria-hidden=\"true\" focusable=\"false\">" +
         std::string(inside) + "</svg>";
}

// Each state has an outline of its own, so that it is known without its colour.
constexpr std::string_view kRoundTick =
    "<circle cx=\"12\" cy=\"12\" r=\"10\"/><path d=\"M7 12.5l3.5 3.5L17 9\"/>";
constexpr std::string_view kSquareBar = "<path d=\"M3 3h18v18H3z\"/><path d=\"M8 8l8 8M16 8l-8 8\"/>";
constexpr std::string_view kRhombus =
    "<path d=\"M12 1.5L22.5 12L12 22.5L1.5 12z\"/><path d=\"M8 12h.01M12 12h.01M16 12h.01\"/>";
constexpr std::string_view kHourglass = "<path d=\"M6 3h12L12 12L18 21H6L12 12z\"/>";
constexpr std::string_view kTriangle = "<path d=\"M12 2.5L22.5 21H1.5z\"/><path d=\"M12 9v6M12 18h.01\"/>";
constexpr std::string_view kFlag = "<path d=\"M5 22V3h13l-3 4.5l3 4.5H5\"/>";

std::string_view answer_icon(AnswerKind kind) {
  switch (kind) {
    case AnswerKind::yes:
      return kRoundTick;
    case AnswerKind::no:
      return kSquareBar;
    case AnswerKind::starting:
      return kHourglass;
    case AnswerKind::not_yet:
      break;
  }
  return kRhombus;
}

std::string answer_css(AnswerKind kind) {
  switch (kind) {
    case AnswerKind::yes:
      return "yes";
    case AnswerKind::no:
      return "no";
    case AnswerKind::starting:
      return "starting";
    case AnswerKind::not_yet:
      break;
  }
  return "notyet";
}

std::string_view severity_icon(Severity severity) {
  if (severity == Severity::critical) return kSquareBar;
  return severity == Severity::warning ? kTriangle : kFlag;
}

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

std::string state_html(const Alert& alert) {
  if (alert.state == AlertState::resolved)
    return "<p>Resolved" + (alert.resolved_at ? " " + time_html(*alert.resolved_at) : std::string()) +
           (alert.resolved_reason.empty() ? "" : ": " + escaped(spaced(alert.resolved_reason))) + ".</p>";
  if (alert.acknowledged)
    return "<p>Acknowledged by " + escaped(alert.acknowledged->by) + " " + time_html(alert.acknowledged->at) +
           (alert.acknowledged->note.empty() ? "." : ": " + escaped(alert.acknowledged->note)) + "</p>";
  const std::string id = std::to_string(alert.id);
  return "<p class=\"hint\">Not acknowledged. To acknowledge it: <code>POST /api/alerts/" + id +
         "/acknowledge</code> with <code>{&quot;by&quot;: &quot;\u2026&quot;, &quot;note&quot;: "
         "&quot;\u2026&quot;}</code>"
         " and an operator token.</p>";
}

std::string told_since(const Alert& alert) {
  std::string out = "since " + time_html(alert.opened_at);
  if (alert.started_at || alert.started_between)
    out += "; begun " + flowing_html(beginning_words(alert.started_at, alert.started_between));
  return out;
}

}  // namespace

std::string link_html(const std::string& path, std::string_view words) {
  return "<a href=\"" + escaped(path) + "\">" + escaped(words) + "</a>";
}

std::string answer_html(const Answer& answer, bool foremost) {
  std::string out = "<div class=\"answer " + answer_css(answer.kind) + (foremost ? " foremost" : "") + "\">";
  out += "<p class=\"word\">" + icon(answer_icon(answer.kind)) + "<span>" + escaped(answer.word) +
         "</span></p><div>";
  if (!answer.since.empty() || !answer.verdict.empty())
    out += "<p class=\"since\">" + escaped(answer.verdict) +
           (answer.since.empty() ? "" : " " + flowing_html(answer.since)) + "</p>";
  if (!answer.sentence.empty()) out += "<p class=\"sentence\">" + flowing_html(answer.sentence) + "</p>";
  for (const std::string& more : answer.more) out += "<p class=\"more\">" + flowing_html(more) + "</p>";
  return out + "</div></div>";
}

std::string answer_badge_html(const Answer& answer) {
  return "<span class=\"badge " + answer_css(answer.kind) + "\">" + icon(answer_icon(answer.kind)) +
         escaped(answer.word) + "</span>";
}

std::string chart_badge_html(ChartState state) {
  const auto kind = state == ChartState::stable     ? AnswerKind::yes
                    : state == ChartState::unstable ? AnswerKind::no
                                                    : AnswerKind::not_yet;
  return "<span class=\"badge " + answer_css(kind) + "\">" + icon(answer_icon(kind)) + state_words(state) +
         "</span>";
}

std::string alert_html(const PageInput& input, const Alert& alert, int level) {
  const std::string severity = to_string(alert.severity);
  const std::string h = "h" + std::to_string(level);
  std::string out = "<article class=\"alert " + severity +
                    (alert.state == AlertState::resolved ? " resolved" : "") + "\" id=\"alert." +
                    std::to_string(alert.id) + "\">";
  out += "<" + h + "><span class=\"badge " + severity + "\">" + icon(severity_icon(alert.severity)) +
         severity + "</span> " + escaped(alert.title) + "</" + h + ">";
  out += "<p class=\"since\">" + told_since(alert) + "</p>" + paragraphs(alert.text) + state_html(alert);
  const std::string link = subject_link(input, alert.subject);
  return out + (link.empty() ? "" : "<p>" + link + "</p>") + "</article>";
}

std::string warnings_html(const std::vector<std::string>& warnings) {
  if (warnings.empty()) return {};
  std::string out = "<ul class=\"warnings\">";
  for (const std::string& code : warnings) out += "<li>Note: " + escaped(warning_words(code)) + "</li>";
  return out + "</ul>";
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

}  // namespace agreed
