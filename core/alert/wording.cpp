#include "core/alert/wording.hpp"

#include <algorithm>

#include "core/alert/phrases.hpp"

namespace agreed {
namespace {

AlertWords words_of(const Alert& alert, const Settings& settings) {
  switch (alert.kind) {
    case AlertKind::check_standard_unstable:
    case AlertKind::check_standard_biased:
      return chart_words(alert, settings);
    case AlertKind::agreement_lost:
    case AlertKind::agreement_drifting:
    case AlertKind::agreement_unproven:
    case AlertKind::sample_scatter:
    case AlertKind::pair_outlier:
      return comparison_words(alert, settings);
    default:
      return service_words(alert, settings);
  }
}

/// Why it is over. Reasons are names in the API; one that is not known here is written with its words apart.
std::string reason_words(const Alert& alert) {
  const std::string& reason = alert.resolved_reason;
  if (reason.empty()) return "the condition has ceased";
  if (reason == "late_data") return "results that came late have changed the picture";
  if (reason == "configuration_changed") return "under the changed configuration it does not hold";
  if (reason == "acknowledged")
    return alert.acknowledged && !alert.acknowledged->by.empty() ? "acknowledged by " + alert.acknowledged->by
                                                                 : "acknowledged";
  std::string words = reason;
  std::replace(words.begin(), words.end(), '_', ' ');
  return words;
}

void append(std::string& text, const char* label, const std::string& part) {
  if (part.empty()) return;
  if (!text.empty()) text += '\n';
  text += label + part;
}

std::string numbered(const std::vector<std::string>& steps) {
  std::string text;
  for (std::size_t i = 0; i < steps.size(); ++i)
    text += (i == 0 ? "" : " ") + std::to_string(i + 1) + ". " + steps[i];
  return text;
}

std::string last_step(const Alert& alert) {
  return "Acknowledge this alert" +
         std::string(alert.kind == AlertKind::pair_outlier ? ", with what was found." : ".");
}

}  // namespace

std::string subject_words(const Subject& subject) {
  std::string words;
  for (const std::string* part :
       {&subject.comparison, &subject.analyzer, &subject.standard, &subject.measurand, &subject.service})
    if (!part->empty()) words += (words.empty() ? "" : ", ") + *part;
  return words;
}

void write_words(Alert& alert, const Settings& settings) {
  AlertWords words = words_of(alert, settings);
  alert.title = std::move(words.title);
  alert.text.clear();
  const bool over = alert.state == AlertState::resolved;
  if (over)
    append(
        alert.text, "Resolved",
        (alert.resolved_at ? " " + time_words(*alert.resolved_at) : "") + ": " + reason_words(alert) + ".");
  append(alert.text, over ? "It had been found: " : "", words.found);
  append(alert.text, "Since: ", words.since);
  append(alert.text, "Likely cause: ", words.cause);
  append(alert.text, "In doubt: ", words.doubt);
  if (over) return;
  if (alert.state == AlertState::open) words.steps.push_back(last_step(alert));
  append(alert.text, "Next: ", numbered(words.steps));
}

}  // namespace agreed
