#include "daemon/cli/check_sample.hpp"

#include <algorithm>
#include <array>
#include <fstream>
#include <optional>
#include <vector>

#include <fmt/format.h>
#include <nlohmann/json.hpp>

#include "core/base/number_text.hpp"
#include "core/base/rfc3339.hpp"
#include "daemon/cli/intake_context.hpp"
#include "daemon/exit_codes.hpp"
#include "daemon/intake/nearest_known.hpp"
#include "daemon/intake/plain_reader.hpp"
#include "daemon/intake/text.hpp"
#include "daemon/printable.hpp"

namespace agreed {
namespace {

using Json = nlohmann::ordered_json;

const char* words(RowKind kind) {
  constexpr std::array<const char*, 4> kWords = {"check", "split", "intervention", "void"};
  return kWords.at(static_cast<std::size_t>(kind));
}

/// "<0.05"; nothing for a row without a result.
std::string result_of(const Row& row) {
  if (row.kind == RowKind::intervention || row.kind == RowKind::void_) return "";
  const char* const sign = row.censored == Censoring::below   ? "<"
                           : row.censored == Censoring::above ? ">"
                                                              : "";
  return sign + exact(row.value);
}

std::string text_of(const Json& value) {
  return value.dump(-1, ' ', false, Json::error_handler_t::replace);
}

/// Prints rows as they come, so that a file of any size can be looked at.
class Printer final : public RowTaker {
 public:
  Printer(const Settings& settings, AnalyzerIndex own, bool json)
      : settings_(settings), own_(own), json_(json) {}

  void good(Row&& row) override {
    ++good_;
    if (json_)
      print_json(as_json(row));
    else
      print(row);
  }

  void bad(BadRow&& row) override {
    ++bad_;
    if (json_)
      return print_json({{"line", row.line},
                         {"ok", false},
                         {"column", row.column},
                         {"text", printable(row.text)},
                         {"reason", row.reason}});
    const std::string column = row.column == 0 ? "" : fmt::format(", column {}", row.column);
    fmt::print("line {}{}: NOT USABLE: {}\n", row.line, column, row.reason);
  }

  [[nodiscard]] std::size_t good_rows() const { return good_; }
  [[nodiscard]] std::size_t bad_rows() const { return bad_; }

 private:
  [[nodiscard]] std::string measurand_of(const Row& row) const {
    return row.measurand ? settings_.of(*row.measurand).id : "";
  }

  [[nodiscard]] Json as_json(const Row& row) const {
    Json json{{"line", row.line},
              {"ok", true},
              {"analyzer", settings_.of(row.analyzer).id},
              {"kind", words(row.kind)},
              {"measured_at", to_rfc3339(row.measured_at)},
              {"measurand", row.measurand ? Json(measurand_of(row)) : Json(nullptr)},
              {"item", row.item},
              {"replicate", row.replicate},
              {"value", result_of(row).empty() ? Json(nullptr) : Json(row.value)},
              {"censored", row.censored == Censoring::none    ? Json(nullptr)
                           : row.censored == Censoring::below ? Json("below")
                                                              : Json("above")},
              {"operator", row.by},
              {"note", row.note},
              {"clock_ambiguous", row.clock_ambiguous}};
    if (row.kind == RowKind::intervention && row.standard) json["standard"] = settings_.of(*row.standard).id;
    return json;
  }

  void print_json(const Json& row) {
    fmt::print("{}\n  {}", first_ ? "" : ",", text_of(row));
    first_ = false;
  }

  void print(const Row& row) {
    fmt::print("line {}: {} {} {} {} {}", row.line, words(row.kind), to_rfc3339(row.measured_at),
               row.measurand ? measurand_of(row) : "(all measurands)", printable(row.item), result_of(row));
    if (row.replicate != 0) fmt::print(", replicate {}", row.replicate);
    if (row.analyzer != own_) fmt::print(", on {}", settings_.of(row.analyzer).id);
    if (!row.by.empty()) fmt::print(", operator {}", printable(row.by));
    if (!row.note.empty()) fmt::print(", note {}", printable(row.note));
    fmt::print("{}\n", row.clock_ambiguous ? ", this local time happened twice: the earlier is taken" : "");
  }

  const Settings& settings_;
  AnalyzerIndex own_;
  bool json_;
  std::size_t good_ = 0, bad_ = 0;
  bool first_ = true;
};

std::string read(PlainReader& reader, std::ifstream& file) {
  std::array<char, 65'536> block{};
  bool go_on = true;
  while (go_on && file) {
    file.read(block.data(), block.size());
    go_on = reader.feed({block.data(), static_cast<std::size_t>(file.gcount())});
  }
  if (go_on) reader.finish(true);
  return reader.unusable();
}

std::optional<std::size_t> position_of(const Config& config, const std::string& analyzer) {
  const auto found = std::find_if(config.intake.begin(), config.intake.end(),
                                  [&](const IntakeSettings& intake) { return intake.analyzer == analyzer; });
  if (found == config.intake.end()) return std::nullopt;
  return static_cast<std::size_t>(found - config.intake.begin());
}

int say_unknown(const Config& config, const std::string& analyzer) {
  std::vector<std::string_view> known;
  for (const IntakeSettings& intake : config.intake) known.emplace_back(intake.analyzer);
  fmt::print(stderr, "agreed: {} {}; {}\n",
             analyzer.empty() ? "--sample needs --analyzer, the id of the analyzer that wrote the file"
                              : "there is no analyzer " + in_quotes(analyzer),
             analyzer.empty() ? "" : "in the configuration", known_hint(analyzer, known));
  return kWrongUse;
}

}  // namespace

int check_sample(const Config& config, const std::filesystem::path& sample, const std::string& analyzer,
                 bool json) {
  const auto position = position_of(config, analyzer);
  if (!position) return say_unknown(config, analyzer);
  std::error_code error;
  std::ifstream file(sample, std::ios::binary);
  if (!std::filesystem::is_regular_file(sample, error) || !file) {
    fmt::print(stderr, "agreed: {} cannot be read; a file was expected\n", in_quotes(sample.string()));
    return kCouldNotDoIt;
  }
  const IntakeSettings& intake = config.intake[*position];
  const std::string name = sample.filename().string(), fault = name_fault(intake, name);
  if (json)
    fmt::print("{{\"file\": {}, \"analyzer\": {}, \"format\": {}, \"rows\": [", text_of(Json(name)),
               text_of(Json(analyzer)), text_of(Json(intake.format)));
  else
    fmt::print("{} as a file of {}, format {}, zone {}\n", in_quotes(name), analyzer, intake.format,
               intake.zone);
  Printer printer(*config.settings, {static_cast<std::uint32_t>(*position)}, json);
  PlainReader reader(context_of(config, *position), plain_syntax_of(name), printer);
  const std::string unusable = read(reader, file);
  if (json) {
    const auto or_null = [](const std::string& words) { return words.empty() ? Json(nullptr) : Json(words); };
    fmt::print("\n], \"good\": {}, \"bad\": {}, \"unusable\": {}, \"not_taken\": {}}}\n", printer.good_rows(),
               printer.bad_rows(), text_of(or_null(unusable)), text_of(or_null(fault)));
  } else {
    if (!unusable.empty()) fmt::print("the file cannot be used: {}\n", unusable);
    if (!fault.empty()) fmt::print("the file would not be taken: {}\n", fault);
    fmt::print("{} results or other rows as they would be taken in, {} bad rows; nothing was taken in\n",
               printer.good_rows(), printer.bad_rows());
  }
  const bool all_good = unusable.empty() && fault.empty() && printer.bad_rows() == 0;
  return all_good ? kDone : kAnswerIsNo;
}

}  // namespace agreed
