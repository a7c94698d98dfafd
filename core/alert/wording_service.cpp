// The words of alerts about what came in, or did not, and about the service itself.
#include <cmath>
#include <utility>

#include "core/alert/details.hpp"
#include "core/alert/phrases.hpp"

namespace agreed {
namespace {

std::string reason_in(const Alert& alert) {
  const auto reason = text_in(alert.details, "reason");
  return reason ? ": " + *reason : "";
}

/// A sentence's end after foreign words, which may have brought their own.
std::string ended(std::string sentence) {
  if (sentence.empty() || sentence.back() != '.') sentence += '.';
  return sentence;
}

std::string place_in(const Alert& alert) {
  const auto line = number_in(alert.details, "line"), column = number_in(alert.details, "column");
  if (!line || *line < 1) return "";
  return ", line " + fixed(*line, 0) + (column && *column >= 1 ? ", column " + fixed(*column, 0) : "");
}

AlertWords rejected_words(const Alert& alert, const Settings& settings) {
  const std::string analyzer = or_else(alert.subject.analyzer, "an analyzer");
  const auto file = text_in(alert.details, "file");
  const auto rows = number_in(alert.details, "rows"), count = number_in(alert.details, "count");
  const bool several = count.value_or(1) > 1;
  const std::string which = file ? "file " + *file : "a file";
  AlertWords words;
  words.title = several
                    ? counted(*count, "file", "files") + " of " + analyzer + " could not be read in full"
                    : (file ? "File " + *file : "A file") + " of " + analyzer + " could not be read in full";
  words.found = ended((several ? "The newest: " + which : (file ? "File " + *file : std::string("A file"))) +
                      " of analyzer " + analyzer_words(settings, alert.subject.analyzer) + place_in(alert) +
                      reason_in(alert));
  if (rows) words.found += " Not taken: " + counted(*rows, "row", "rows") + ".";
  const auto files = list_in(alert.details, "files");
  if (several && !files.empty()) words.found += " So far: " + list_words(files) + ".";
  words.doubt =
      "nothing that was taken; results in the rejected rows are missing from charts and comparisons.";
  words.steps = {
      "Correct the file, or the export that wrote it, and drop it into the inbox again: rows that "
      "were taken already are recognised.",
      "If the format of the export has changed, have the configuration adapted."};
  return words;
}

AlertWords conflict_words(const Alert& alert, const Settings& settings) {
  const std::string analyzer = or_else(alert.subject.analyzer, "an analyzer");
  const auto item = text_in(alert.details, "item");
  const auto measurand = text_in(alert.details, "measurand");
  const NumberStyle numbers(settings, measurand.value_or(alert.subject.measurand));
  const auto stored = number_in(alert.details, "stored"), offered = number_in(alert.details, "value");
  const auto count = number_in(alert.details, "count");
  const bool several = count.value_or(1) > 1;
  const std::string of = (item ? " of " + *item : std::string()) + (measurand ? " for " + *measurand : "");
  AlertWords words;
  words.title =
      several ? counted(*count, "reading", "readings") + " of " + analyzer + " came again with another value"
              : "A reading" + of + " on " + analyzer + " came again with another value";
  words.found =
      std::string(several ? "The newest: a" : "A") + " reading" + of + " of analyzer " +
      analyzer_words(settings, alert.subject.analyzer) + " is known already and came again" +
      (stored && offered ? " as " + numbers.result(*offered) + " instead of " + numbers.result(*stored)
                         : " with another value") +
      ". What was stored first stands; the newcomer is kept as a rejected row.";
  if (const auto file = text_in(alert.details, "file"))
    words.found += " It is in file " + *file + place_in(alert) + ".";
  const auto items = list_in(alert.details, "items");
  if (several && !items.empty()) words.found += " Items concerned: " + list_words(items) + ".";
  words.doubt = "which of the two values is right.";
  words.steps = {"Look up the right value on the analyzer.",
                 "If the stored one is wrong, void it and send a new row with the right one."};
  return words;
}

AlertWords unpaired_words(const Alert& alert, const Settings& settings) {
  const auto count = number_in(alert.details, "count");
  const auto items = list_in(alert.details, "items");
  AlertWords words;
  words.title = (count ? counted(*count, "split sample", "split samples") : std::string("Split samples")) +
                " of " + or_else(alert.subject.analyzer, "an analyzer") + " found no partner";
  words.found = "Analyzer " + analyzer_words(settings, alert.subject.analyzer) +
                " gave results of split samples whose other half has not come in time" +
                (items.empty() ? "" : ": " + list_words(items)) + ".";
  words.steps = {"Measure the other half, or look for its result; it still counts when it comes.",
                 "Check that both analyzers give the sample the same name."};
  return words;
}

AlertWords inbox_words(const Alert& alert, const Settings& settings) {
  const std::string analyzer = or_else(alert.subject.analyzer, "an analyzer");
  const auto inbox = text_in(alert.details, "inbox");
  AlertWords words;
  words.title = "The inbox of " + analyzer + " cannot be reached";
  words.found =
      ended("The inbox " + (inbox ? *inbox + " " : std::string()) + "of analyzer " +
            analyzer_words(settings, alert.subject.analyzer) + " cannot be listed" + reason_in(alert));
  words.found += " Until it can, no results of it come in and nobody watches over it.";
  words.since = since_words(alert);
  words.doubt = "nothing that came before; what is measured meanwhile is not looked at.";
  words.steps = {"Check the network share and the rights of the service on the folder.",
                 "Nothing need be sent again: what waits in the folder is read once it can be reached."};
  return words;
}

/// Kinds that need no more than one sentence.
AlertWords plain_words(const Alert& alert, const std::string& what, const std::string& step) {
  AlertWords words;
  words.title = what;
  words.found = ended(what + reason_in(alert));
  words.since = since_words(alert);
  words.steps = {step};
  return words;
}

std::optional<Instant> time_in(const Details& details, std::string_view name) {
  const auto text = text_in(details, name);
  const auto parsed = text ? parse_rfc3339(*text) : std::nullopt;
  return parsed ? std::optional(parsed->at) : std::nullopt;
}

/// "8 h", "90 min": the largest unit of which it is a whole number.
std::string every_words(double seconds) {
  for (const auto& [size, unit] :
       {std::pair(86400.0, " d"), std::pair(3600.0, " h"), std::pair(60.0, " min")})
    if (seconds >= size && std::fmod(seconds, size) < 1e-6 * size) return exact(seconds / size) + unit;
  return exact(seconds) + " s";
}

/// Something that did not come although it was due.
AlertWords missing_words(const Alert& alert, const std::string& what, const std::string& expected,
                         const std::string& step) {
  AlertWords words = plain_words(alert, what, step);
  words.since.clear();
  if (alert.started_at) words.since = "overdue since " + time_words(*alert.started_at) + ".";
  if (const auto last = time_in(alert.details, "last_received_at"))
    words.found += " The last came at " + time_words(*last) + ".";
  if (const auto start = time_in(alert.details, "service_started_at"))
    words.found += " None came since the service was started at " + time_words(*start) + ".";
  if (const auto every = number_in(alert.details, "every_seconds"))
    words.found += " " + expected + " every " + every_words(*every) + ".";
  words.doubt = "nothing yet; but what happens meanwhile is not seen.";
  return words;
}

AlertWords storage_words(const Alert& alert) {
  AlertWords words = plain_words(alert, "Storage for the journal runs low",
                                 "Make room on the disk that holds the state folder.");
  const auto folder = text_in(alert.details, "folder");
  const auto least = number_in(alert.details, "least_free_mb");
  if (least)
    words.found += " Less than " + exact(*least) + " MB are free" + (folder ? " for " + *folder : "") +
                   ". When the disk is full nothing is taken in; files wait in the inboxes.";
  words.doubt = "nothing that was taken in.";
  return words;
}

AlertWords overdue_words(const Alert& alert, const std::string& analyzer) {
  const auto standards = list_in(alert.details, "standards");
  const std::string which = standards.empty()       ? std::string("A check standard is")
                            : standards.size() == 1 ? "Check standard " + standards.front() + " is"
                                                    : "Check standards " + list_words(standards) + " are";
  return missing_words(
      alert, which + " overdue on " + analyzer, "It is expected",
      standards.size() > 1 ? "Run the check standards that are due." : "Run the check standard that is due.");
}

}  // namespace

AlertWords service_words(const Alert& alert, const Settings& settings) {
  const std::string analyzer = or_else(alert.subject.analyzer, "an analyzer");
  switch (alert.kind) {
    case AlertKind::file_rejected:
      return rejected_words(alert, settings);
    case AlertKind::readings_conflict:
      return conflict_words(alert, settings);
    case AlertKind::unpaired_samples:
      return unpaired_words(alert, settings);
    case AlertKind::inbox_unreachable:
      return inbox_words(alert, settings);
    case AlertKind::check_overdue:
      return overdue_words(alert, analyzer);
    case AlertKind::pairs_overdue:
      return missing_words(
          alert, "Split samples are overdue for " + or_else(alert.subject.comparison, "a comparison"),
          "A pair is expected", "Run a split sample on both analyzers.");
    case AlertKind::results_silent:
      return missing_words(alert, "No results come from " + analyzer, "Something is expected",
                           "See whether it is running and its export reaches the inbox.");
    case AlertKind::storage_low:
      return storage_words(alert);
    case AlertKind::delivery_failing:
      return plain_words(
          alert, "Messages to " + or_else(alert.subject.service, "a webhook") + " cannot be delivered",
          "Check the receiving side and the route's address and secret.");
    default:
      return plain_words(alert, to_string(alert.kind), "Look at the page of what it is about.");
  }
}

}  // namespace agreed
