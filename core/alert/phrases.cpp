#include "core/alert/phrases.hpp"

#include <algorithm>
#include <cmath>

#include "core/alert/details.hpp"

namespace agreed {
namespace {

constexpr int kDigitsWithoutDecimals = 5;

}  // namespace

NumberStyle::NumberStyle(const Settings& settings, const std::string& measurand) {
  for (const auto& known : settings.measurands)
    if (known.id == measurand) {
      unit_ = known.unit.empty() ? "" : " " + known.unit;
      decimals_ = known.decimals;
    }
}

std::string NumberStyle::result(double value) const {
  return (decimals_ ? fixed(value, *decimals_) : significant(value, kDigitsWithoutDecimals)) + unit_;
}

std::string NumberStyle::mean(double value) const {
  return (decimals_ ? fixed(value, *decimals_ + 1) : significant(value, kDigitsWithoutDecimals)) + unit_;
}

std::string NumberStyle::range(double low, double high) const {
  const std::string first = mean(low);
  return first.substr(0, first.size() - unit_.size()) + " to " + mean(high);
}

std::string percent(double share) {
  return significant(100.0 * share, 4) + " %";
}

std::string analyzer_words(const Settings& settings, const std::string& id) {
  for (const auto& analyzer : settings.analyzers)
    if (analyzer.id == id && !analyzer.title.empty() && analyzer.title != id)
      return id + " (" + analyzer.title + ")";
  return or_else(id, "the analyzer");
}

// What told it on a classical chart.
std::string signals_words(const Details& details) {
  std::vector<std::string> names = list_in(details, "signals");
  if (names.empty()) return "";
  for (std::string& name : names) {
    std::replace(name.begin(), name.end(), '_', ' ');
    if (name == "ewma") name = "EWMA";
    if (name == "cusum") name = "cumulative sum";
  }
  return " (told by: " + list_words(names) + ")";
}

std::string score_words(const Details& details) {
  if (text_in(details, "method") == "classical") return signals_words(details);
  const auto score = number_in(details, "score"), limit = number_in(details, "limit");
  if (!score) return "";
  return " (change score " + fixed(*score, 2) + (limit ? ", limit " + fixed(*limit, 2) : "") + ")";
}

const char* direction(double shift) {
  return shift < 0 ? "lower" : "higher";
}

std::string since_words(const Alert& alert) {
  const auto& between = alert.started_between;
  if (!alert.started_at && !between) return "";
  if (!between) return "most likely " + time_words(*alert.started_at) + ".";
  const std::string first = time_words(between->first), last = time_words(between->last);
  if (!alert.started_at)
    return first == last ? first + "." : "some moment from " + first + " to " + last + ".";
  const std::string start = "most likely " + time_words(*alert.started_at);
  if (first == last) return start + ".";
  return start + "; a start from " + first + " to " + last + " is possible.";
}

std::string earliest_start(const Alert& alert) {
  if (alert.started_between) return " since " + time_words(alert.started_between->first);
  if (alert.started_at) return " since " + time_words(*alert.started_at);
  return "";
}

std::string list_words(const std::vector<std::string>& names) {
  constexpr std::size_t most = 5;
  const std::size_t first = names.size() > most ? names.size() - most : 0;
  std::string text;
  for (std::size_t i = first; i < names.size(); ++i) {
    if (i > first) text += first == 0 && i + 1 == names.size() ? " and " : ", ";
    text += names[i];
  }
  return first == 0 ? text : text + " (the newest of " + std::to_string(names.size()) + ")";
}

std::string or_else(const std::string& id, const char* otherwise) {
  return id.empty() ? otherwise : id;
}

}  // namespace agreed
