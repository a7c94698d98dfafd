#include "daemon/render/status_text.hpp"

#include <algorithm>
#include <cmath>
#include <sstream>
#include <stdexcept>
#include <vector>

#include "core/base/utf8.hpp"
#include "daemon/printable.hpp"
#include "daemon/render/json_parts.hpp"
#include "daemon/render/page_text.hpp"
#include "daemon/render/page_words.hpp"

namespace agreed {
namespace {

constexpr std::size_t kWidth = 80, kLabel = 16;
constexpr std::size_t kMostComparisons = 8, kMostAnalyzers = 8, kMostAlerts = 5;

enum class Tone { plain, good, doubtful, bad };

const char* colour_code(Tone tone) {
  switch (tone) {
    case Tone::good:
      return "\x1b[32m";
    case Tone::doubtful:
      return "\x1b[33m";
    case Tone::bad:
      return "\x1b[1;31m";
    case Tone::plain:
      break;
  }
  return "";
}

std::size_t columns(std::string_view text) {
  std::size_t count = 0;
  for (; !text.empty(); ++count) text.remove_prefix(std::max<std::size_t>(1, utf8_length(text)));
  return count;
}

/// In at most `most` columns.
std::string fitted(const std::string& text, std::size_t most) {
  return columns(text) <= most ? text : shortened(text, most - 1);
}

/// The words of `text` in lines of at most `width` columns; a longer word is cut.
std::vector<std::string> wrapped(const std::string& text, std::size_t width) {
  std::vector<std::string> lines(1);
  std::istringstream words(text);
  for (std::string word; words >> word;) {
    word = fitted(word, width);
    std::string& line = lines.back();
    if (line.empty())
      line = word;
    else if (columns(line) + 1 + columns(word) <= width)
      line += " " + word;
    else
      lines.push_back(word);
  }
  return lines;
}

/// Lines with a label in front; what follows it is wrapped and stays to its right.
class Screen {
 public:
  explicit Screen(bool colour) : colour_(colour) {}

  /// `first` is what stands out of the text and is coloured.
  void row(const std::string& label, const std::string& first, Tone tone, const std::string& rest = "") {
    const std::string gap = first.empty() || rest.empty() ? "" : " ";
    auto lines = wrapped(first + gap + rest, kWidth - kLabel);
    if (colour_ && tone != Tone::plain && !first.empty() && lines.front().rfind(first, 0) == 0)
      lines.front() = colour_code(tone) + first + "\x1b[0m" + lines.front().substr(first.size());
    std::string front = fitted(label, kLabel - 1);
    for (const std::string& line : lines) {
      text_ += front;
      if (!line.empty()) text_.append(kLabel - columns(front), ' ').append(line);
      text_ += '\n';
      front.clear();
    }
  }
  void row(const std::string& label, const std::string& rest) { row(label, "", Tone::plain, rest); }
  void blank() { text_ += '\n'; }
  /// A line of its own from the first column on, all of it coloured.
  void headline(const std::string& words, Tone tone) {
    for (const std::string& line : wrapped(words, kWidth))
      text_ += colour_ && tone != Tone::plain ? colour_code(tone) + line + "\x1b[0m\n" : line + "\n";
  }
  [[nodiscard]] std::string take() { return std::move(text_); }

 private:
  bool colour_;
  std::string text_;
};

const Json& part(const Json& object, const char* name) {
  static const Json kNothing;
  if (!object.is_object()) return kNothing;
  const auto found = object.find(name);
  return found == object.end() ? kNothing : *found;
}

std::string words(const Json& object, const char* name) {
  const Json& value = part(object, name);
  return value.is_string() ? printable(value.get<std::string>()) : "";
}

std::optional<double> number(const Json& object, const char* name) {
  const Json& value = part(object, name);
  return value.is_number() ? std::optional(value.get<double>()) : std::nullopt;
}

/// "3 rejected"; 0 when the number is missing.
std::string count(const Json& object, const char* name, const std::string& word) {
  return significant(number(object, name).value_or(0), 15) + " " + word;
}

std::optional<Instant> time(const Json& object, const char* name) {
  const auto read = parse_rfc3339(words(object, name));
  return read ? std::optional(read->at) : std::nullopt;
}

std::string ago(Instant at, Instant now) {
  return at > now ? "at " + time_words(at) : shown_span(now - at) + " ago";
}

struct Overall {
  const char* words;
  Tone tone;
};

Overall overall_words(const std::string& overall) {
  if (overall == "ok") return {"everything agrees", Tone::good};
  if (overall == "alert") return {"ALERT: agreement is lost, or a critical alert is open", Tone::bad};
  if (overall == "attention")
    return {"ATTENTION: an alert is open, or agreement is not shown", Tone::doubtful};
  return {"STARTING: nothing can be said yet", Tone::doubtful};
}

void show_head(Screen& screen, const Json& status, const std::string& url, Instant now) {
  const Overall overall = overall_words(words(status, "overall"));
  screen.headline(words(status, "site") + ": " + overall.words, overall.tone);
  std::string line = printable(url) + ", agreed " + words(part(status, "service"), "version");
  if (const auto started = time(part(status, "service"), "started_at"))
    line += ", up " + shown_span(std::max(Duration::zero(), now - *started));
  if (const auto at = time(status, "at")) line += ", as of " + time_words(*at);
  screen.headline(line, Tone::plain);
}

Tone tone_of_verdict(const std::string& verdict) {
  if (verdict == "agreement_shown") return Tone::good;
  return verdict == "disagreement_shown" ? Tone::bad : Tone::doubtful;
}

/// "largest bias, line2 - line1: +0.02 at 13, 10 % of allowable 0.2"
std::string bias_words(const Json& comparison) {
  const std::string between = words(comparison, "y") + " - " + words(comparison, "x");
  const Json& largest = part(comparison, "largest_bias");
  const auto level = number(largest, "level"), bias = number(largest, "bias"),
             allowable = number(largest, "allowable");
  if (!level || !bias || !allowable || !(*allowable > 0)) return "no bias known yet, " + between;
  return "largest bias, " + between + ": " + (*bias > 0 ? "+" : "") + significant(*bias, 3) + " at " +
         significant(*level, 6) + ", " + significant(std::round(100 * std::abs(*bias) / *allowable), 6) +
         " % of allowable " + significant(*allowable, 3);
}

void show_comparison(Screen& screen, const Json& comparison) {
  const std::string verdict = words(comparison, "verdict");
  std::string more = "(" + counted(number(comparison, "pairs").value_or(0), "pair", "pairs") + ")";
  if (const auto since = time(comparison, "verdict_since")) more = "since " + time_words(*since) + " " + more;
  screen.row("  " + words(comparison, "id"), spaced(verdict), tone_of_verdict(verdict), more);
  screen.row("", bias_words(comparison));
  if (const std::string reason = words(comparison, "verdict_reason"); !reason.empty())
    screen.row("", reason_words(reason));
  if (const auto lost = time(comparison, "agreement_lost_at"))
    screen.row("", "agreement lost", Tone::bad, "at " + time_words(*lost));
}

/// What shows agreement goes last, so that it is what the screen has no room for.
std::vector<Json> worst_first(const Json& list) {
  std::vector<Json> comparisons(list.begin(), list.end());
  if (comparisons.size() > kMostComparisons)
    std::stable_partition(comparisons.begin(), comparisons.end(), [](const Json& comparison) {
      return words(comparison, "verdict") != "agreement_shown";
    });
  return comparisons;
}

void show_more(Screen& screen, std::size_t all, std::size_t shown_ones) {
  if (all > shown_ones) screen.row("", "and " + std::to_string(all - shown_ones) + " more");
}

void show_comparisons(Screen& screen, const Json& list) {
  screen.row("COMPARISONS", list.empty() ? "none is configured" : "");
  const auto comparisons = worst_first(list);
  for (std::size_t i = 0; i < std::min(comparisons.size(), kMostComparisons); ++i)
    show_comparison(screen, comparisons[i]);
  show_more(screen, comparisons.size(), kMostComparisons);
}

Tone tone_of_severity(const std::string& severity) {
  if (severity == "critical") return Tone::bad;
  return severity == "warning" ? Tone::doubtful : Tone::plain;
}

void show_alerts(Screen& screen, const Json& counts, const Json& alerts, Instant now) {
  const double open = number(counts, "open").value_or(0);
  const double acknowledged = number(counts, "acknowledged").value_or(0);
  screen.row("ALERTS", significant(open, 15) + " open", open > 0 ? Tone::doubtful : Tone::plain,
             "and " + significant(acknowledged, 15) + " acknowledged");
  if (!alerts.is_array()) return;
  for (std::size_t i = 0; i < std::min(alerts.size(), kMostAlerts); ++i) {
    const Json& alert = alerts[i];
    std::string title = words(alert, "title");
    if (words(alert, "state") == "acknowledged") title += ", acknowledged";
    if (const auto opened = time(alert, "opened_at")) title += ", " + ago(*opened, now);
    screen.row("  " + words(alert, "id"), words(alert, "severity") + ":",
               tone_of_severity(words(alert, "severity")), title);
  }
  const auto all = static_cast<std::size_t>(std::max(0.0, open + acknowledged));
  if (!alerts.empty()) show_more(screen, all, std::min(alerts.size(), kMostAlerts));
}

std::string chart_words(const Json& charts) {
  std::string text;
  for (const char* state : {"stable", "unstable", "learning"})
    if (number(charts, state).value_or(0) > 0)
      text += (text.empty() ? "" : ", ") + count(charts, state, state);
  return text.empty() ? "no charts" : "charts: " + text;
}

void show_analyzer(Screen& screen, const Json& analyzer, Instant now) {
  const auto last = time(analyzer, "last_reading_at");
  const Json& inbox = part(analyzer, "inbox");
  const bool unstable = number(part(analyzer, "charts"), "unstable").value_or(0) > 0;
  const std::string reading = last ? "last reading " + ago(*last, now) : "no reading yet";
  screen.row("  " + words(analyzer, "id"), reading + "; " + chart_words(part(analyzer, "charts")),
             unstable ? Tone::bad : Tone::plain);
  const Json& reachable = part(inbox, "reachable");
  if (reachable.is_boolean() && !reachable.get<bool>())
    screen.row("", "inbox not reachable:", Tone::bad, words(inbox, "reason"));
}

void show_analyzers(Screen& screen, const Json& list, Instant now) {
  screen.row("ANALYZERS", "");
  for (std::size_t i = 0; i < std::min(list.size(), kMostAnalyzers); ++i) show_analyzer(screen, list[i], now);
  show_more(screen, list.size(), kMostAnalyzers);
}

void show_intake(Screen& screen, const Json& intake, Instant now) {
  const Json& files = part(intake, "files");
  const Json& readings = part(intake, "readings");
  const auto last = time(intake, "last_commit_at");
  screen.row("INTAKE", counted(number(intake, "pending_files").value_or(0), "file waits", "files wait") +
                           "; " + (last ? "last taken in " + ago(*last, now) : "nothing was taken in yet"));
  screen.row("  files", count(files, "done", "taken") + ", " + count(files, "repeated", "repeated") + ", " +
                            count(files, "rejected", "rejected"));
  screen.row("  readings",
             count(readings, "accepted", "accepted") + ", " + count(readings, "repeated", "repeated") + ", " +
                 count(readings, "rejected", "rejected") + ", " + count(readings, "voided", "taken back"));
}

Json array_at(const Json& object, const char* name) {
  const Json& value = part(object, name);
  return value.is_array() ? value : Json::array();
}

}  // namespace

StatusText status_text(const StatusAnswers& answers, Instant now, bool colour) {
  const Json status = Json::parse(answers.status, nullptr, false);
  const std::string overall = words(status, "overall");
  if (overall.empty()) throw std::invalid_argument("it is not the status of agreed");
  Screen screen(colour);
  show_head(screen, status, answers.url, now);
  screen.blank();
  show_comparisons(screen, array_at(status, "comparisons"));
  show_alerts(screen, part(status, "alerts"), part(Json::parse(answers.alerts, nullptr, false), "alerts"),
              now);
  show_analyzers(screen, array_at(status, "analyzers"), now);
  show_intake(screen, part(status, "intake"), now);
  return {overall == "ok", screen.take()};
}

}  // namespace agreed
