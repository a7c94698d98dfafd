#include "daemon/http/intake_parameters.hpp"

#include <algorithm>
#include <array>
#include <limits>

#include "core/base/rfc3339.hpp"
#include "daemon/hex.hpp"
#include "daemon/intake/nearest_known.hpp"
#include "daemon/printable.hpp"

namespace agreed {
namespace {

constexpr int kMostReadings = 5'000;
constexpr const char* kWrongCursor = "after must be the value of `next` in an earlier answer.";
// Names and items hold no control characters.
constexpr char kBetweenFields = '\x1f';

/// What is wrong with the names of the parameters; empty when nothing is.
std::string wrong_names(const Target& target, const std::vector<std::string_view>& known) {
  for (auto at = target.parameters.begin(); at != target.parameters.end(); ++at) {
    const std::string& name = at->first;
    if (std::find(known.begin(), known.end(), name) == known.end())
      return "There is no parameter " + printable(name) + "; " + known_hint(name, known);
    if (std::any_of(target.parameters.begin(), at, [&](const auto& other) { return other.first == name; }))
      return "The parameter " + name + " is given twice.";
  }
  return {};
}

std::string given(const Target& target, std::string_view name) {
  const std::string* text = target.parameter(name);
  return text ? *text : std::string();
}

std::string read_time(const Target& target, std::string_view name, std::optional<Instant>& into) {
  const std::string* text = target.parameter(name);
  if (!text) return {};
  const auto time = parse_rfc3339(*text);
  if (!time || !time->offset_given)
    return std::string(name) + " must be a time like 2026-01-05T06:00:00Z (write + as %2B).";
  into = time->at;
  return {};
}

std::optional<std::string> from_hex(std::string_view text) {
  constexpr std::string_view digits = "0123456789abcdef";
  if (text.size() % 2 != 0) return std::nullopt;
  std::string bytes;
  for (std::size_t i = 0; i < text.size(); i += 2) {
    const auto high = digits.find(text[i]), low = digits.find(text[i + 1]);
    if (high == std::string_view::npos || low == std::string_view::npos) return std::nullopt;
    bytes.push_back(static_cast<char>(high * 16 + low));
  }
  return bytes;
}

std::optional<std::int64_t> signed_number(std::string_view text) {
  const bool negative = !text.empty() && text.front() == '-';
  const auto number = whole_number(negative ? text.substr(1) : text);
  if (!number) return std::nullopt;
  return negative ? -*number : *number;
}

std::vector<std::string> fields_of(std::string_view text) {
  std::vector<std::string> fields;
  while (true) {
    const auto end = text.find(kBetweenFields);
    fields.emplace_back(text.substr(0, end));
    if (end == std::string_view::npos) return fields;
    text.remove_prefix(end + 1);
  }
}

/// The key a cursor stands for; nothing if it is none of ours.
std::optional<ReadingRow> row_before(std::string_view cursor) {
  const auto text = from_hex(cursor);
  if (!text) return std::nullopt;
  const auto fields = fields_of(*text);
  if (fields.size() != 7) return std::nullopt;
  const auto at = signed_number(fields[4]), replicate = signed_number(fields[5]),
             revision = whole_number(fields[6]);
  if (!at || !replicate || !revision || (fields[1] != "0" && fields[1] != "1")) return std::nullopt;
  ReadingRow row;
  row.analyzer = fields[0];
  row.kind = fields[1] == "0" ? StoredKind::check : StoredKind::split;
  row.measurand = fields[2];
  row.item = fields[3];
  row.measured_at = Instant{Duration{*at}};
  row.replicate = static_cast<std::int32_t>(*replicate);
  row.revision = *revision;
  return row;
}

/// Kind and item, which standard and sample name too.
std::string read_item(const Target& target, ReadingQuery& query) {
  const std::string* kind = target.parameter("kind");
  if (kind && *kind != "check" && *kind != "split") return "kind must be check or split.";
  if (kind) query.kind = *kind == "check" ? StoredKind::check : StoredKind::split;
  const std::string* standard = target.parameter("standard");
  const std::string* sample = target.parameter("sample");
  if (standard && sample) return "Either standard or sample may be given: a reading has one of them.";
  if (!standard && !sample) return {};
  const StoredKind meant = standard ? StoredKind::check : StoredKind::split;
  if (query.kind && *query.kind != meant)
    return standard ? "standard goes with kind=check only." : "sample goes with kind=split only.";
  query.kind = meant;
  query.item = standard ? *standard : *sample;
  if (query.item.empty()) return standard ? "standard must not be empty." : "sample must not be empty.";
  return {};
}

template <class Things>
std::string not_configured(const Target& target, std::string_view what, const Things& things) {
  const std::string* name = target.parameter(what);
  if (!name) return {};
  std::vector<std::string_view> known;
  known.reserve(things.size());
  for (const auto& thing : things) known.push_back(thing.id);
  if (std::find(known.begin(), known.end(), *name) != known.end()) return {};
  return "There is no " + std::string(what) + " " + printable(*name) + "; " + known_hint(*name, known);
}

std::string percent_encoded(std::string_view text) {
  constexpr std::string_view plain = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789-._~";
  std::string encoded;
  for (const char c : text) {
    if (plain.find(c) != std::string_view::npos)
      encoded.push_back(c);
    else
      encoded += "%" + to_hex(std::array{static_cast<unsigned char>(c)});
  }
  return encoded;
}

}  // namespace

Parameter<FileQuery> file_query(const Target& target) {
  Parameter<FileQuery> query;
  query.error = wrong_names(target, {"outcome", "analyzer", "limit", "after"});
  if (!query.error.empty()) return query;
  const auto limit = count_parameter(target, "limit");
  query.value.limit = limit.value;
  query.error = limit.error;
  query.value.analyzer = given(target, "analyzer");
  query.value.outcome = given(target, "outcome");
  constexpr std::array outcomes = {"done", "repeated", "rejected", kGrownOutcome};
  if (target.parameter("outcome") &&
      std::find(outcomes.begin(), outcomes.end(), query.value.outcome) == outcomes.end())
    query.error = "outcome must be done, repeated, rejected or grown.";
  if (const std::string* cursor = target.parameter("after")) {
    const auto id = whole_number(*cursor);
    if (!id || *id < 1) query.error = kWrongCursor;
    query.value.before_id = id.value_or(0);
  }
  return query;
}

Parameter<ReadingQuery> reading_query(const Target& target) {
  Parameter<ReadingQuery> query;
  query.error = wrong_names(
      target, {"analyzer", "measurand", "standard", "sample", "kind", "from", "to", "limit", "after"});
  if (!query.error.empty()) return query;
  const auto limit = count_parameter(target, "limit", kMostReadings);
  query.value.limit = limit.value;
  query.value.analyzer = given(target, "analyzer");
  query.value.measurand = given(target, "measurand");
  query.error = limit.error;
  if (query.error.empty()) query.error = read_item(target, query.value);
  if (query.error.empty()) query.error = read_time(target, "from", query.value.from);
  if (query.error.empty()) query.error = read_time(target, "to", query.value.to);
  if (const std::string* cursor = target.parameter("after"); cursor && query.error.empty()) {
    query.value.after = row_before(*cursor);
    if (!query.value.after) query.error = kWrongCursor;
  }
  return query;
}

std::string reading_cursor(const ReadingRow& row) {
  std::string text = row.analyzer;
  for (const std::string& field : {std::string(row.kind == StoredKind::check ? "0" : "1"), row.measurand,
                                   row.item, std::to_string(row.measured_at.time_since_epoch().count()),
                                   std::to_string(row.replicate), std::to_string(row.revision)})
    text.append(1, kBetweenFields).append(field);
  return to_hex(std::vector<unsigned char>(text.begin(), text.end()));
}

std::string unknown_name(const Target& target, const Settings& settings) {
  std::string unknown = not_configured(target, "analyzer", settings.analyzers);
  if (unknown.empty()) unknown = not_configured(target, "measurand", settings.measurands);
  if (unknown.empty()) unknown = not_configured(target, "standard", settings.standards);
  return unknown;
}

std::string next_page(const Target& target, const std::string& cursor) {
  std::string link = target.path + "?";
  for (const auto& [name, value] : target.parameters)
    if (name != "after") link += percent_encoded(name) + "=" + percent_encoded(value) + "&";
  return link + "after=" + cursor;
}

}  // namespace agreed
