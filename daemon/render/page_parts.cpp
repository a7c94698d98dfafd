// What the pages share: answers and badges.
#include "daemon/journal/journal_types.hpp"
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
constexpr std::string_view kClock = "<circle cx=\"12\" cy=\"12\" r=\"10\"/><path d=\"M12 6v6l-4 3\"/>";
constexpr std::string_view kBrokenCircle =
    "<path d=\"M9 2.5a10 10 0 0 0 0 19M15 2.5a10 10 0 0 1 0 19M9 8v8M15 8v8\"/>";
constexpr std::string_view kTwice = "<path d=\"M3 3h13v13H3zM8 16v5h13V8h-5\"/>";
constexpr std::string_view kGrowing = "<path d=\"M4 21h16M12 17V3M6 9l6-6l6 6\"/>";
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
    case AnswerKind::out_of_date:
      return kClock;
    case AnswerKind::interrupted:
      return kBrokenCircle;
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
    case AnswerKind::out_of_date:
    case AnswerKind::interrupted:
      return "old";
    case AnswerKind::not_yet:
      break;
  }
  return "notyet";
}

std::string_view severity_icon(Severity severity) {
  if (severity == Severity::critical) return kSquareBar;
  return severity == Severity::warning ? kTriangle : kFlag;
}

}  // namespace

std::string paragraph_html(std::string_view words) {
  return words.empty() ? std::string() : "<p>" + flowing_html(words) + "</p>";
}

std::string link_html(const std::string& path, std::string_view words) {
  return "<a href=\"" + escaped(path) + "\">" + escaped(words) + "</a>";
}

std::string choice_link(const std::string& path, const std::string& words, bool chosen) {
  return "<li><a href=\"" + escaped(path) + "\"" + (chosen ? " aria-current=\"true\"" : "") + ">" +
         escaped(words) + "</a></li>";
}

std::string answer_html(const Answer& answer, bool foremost) {
  std::string out = "<div class=\"answer " + answer_css(answer.kind) + (foremost ? " foremost" : "") + "\">";
  out += "<p class=\"word\">" + icon(answer_icon(answer.kind)) + "<span>" + escaped(answer.word) +
         "</span></p><div>";
  if (foremost) out += "<p class=\"before\" hidden></p>";
  if (!answer.since.empty() || !answer.verdict.empty())
    out += "<p class=\"since\">" + escaped(answer.verdict) +
           (answer.since.empty() ? "" : " " + flowing_html(answer.since)) + "</p>";
  if (!answer.age.empty()) out += "<p class=\"age\">" + flowing_html(answer.age) + "</p>";
  if (!answer.sentence.empty()) out += "<p class=\"sentence\">" + flowing_html(answer.sentence) + "</p>";
  for (const std::string& more : answer.more) out += "<p class=\"more\">" + flowing_html(more) + "</p>";
  return out + "</div></div>";
}

std::string starting_html(const PageInput& input) {
  return input.snapshot.started ? std::string() : answer_html(overall_answer(input.snapshot), true);
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

std::string severity_badge_html(Severity severity) {
  const std::string word = to_string(severity);
  return "<span class=\"badge " + word + "\">" + icon(severity_icon(severity)) + word + "</span>";
}

std::string file_badge_html(const std::string& outcome) {
  const auto badge = [](std::string_view css, std::string_view shape, std::string_view words) {
    return "<span class=\"badge " + std::string(css) + "\">" + icon(shape) + std::string(words) + "</span>";
  };
  if (outcome == "done") return badge("yes", kRoundTick, "taken in");
  if (outcome == "repeated") return badge("starting", kTwice, "came before");
  if (outcome == "rejected") return badge("no", kSquareBar, "rejected");
  if (outcome == kGrownOutcome) return badge("starting", kGrowing, "taken so far");
  return badge("notyet", kHourglass, "being taken in");
}

std::string warnings_html(const std::vector<std::string>& warnings) {
  if (warnings.empty()) return {};
  std::string out = "<ul class=\"warnings\">";
  for (const std::string& code : warnings) out += "<li>Note: " + escaped(warning_words(code)) + "</li>";
  return out + "</ul>";
}

}  // namespace agreed
