#include "daemon/intake/told_intervention.hpp"

#include <algorithm>
#include <array>
#include <utility>

#include "core/base/rfc3339.hpp"
#include "daemon/intake/nearest_known.hpp"
#include "daemon/intake/row_maker.hpp"
#include "daemon/intake/text.hpp"

namespace agreed {
namespace {

using Column = PlainColumn;

struct ToldField {
  std::string_view name;
  Column column;
  std::string ToldIntervention::*text;
};

// Their places here, from 1, stand for the columns of a file.
constexpr std::array<ToldField, 7> kFields = {{{"analyzer", Column::analyzer, &ToldIntervention::analyzer},
                                               {"standard", Column::standard, &ToldIntervention::standard},
                                               {"measurand", Column::measurand, &ToldIntervention::measurand},
                                               {"kind", Column::item, &ToldIntervention::kind},
                                               {"at", Column::measured_at, &ToldIntervention::at},
                                               {"by", Column::by, &ToldIntervention::by},
                                               {"note", Column::note, &ToldIntervention::note}}};

/// The one row, or what is wrong with it.
class OneRow final : public RowTaker {
 public:
  void good(Row&& row) override { result = std::move(row); }
  void bad(BadRow&& row) override {
    // The reason begins with the column's name in a file, which is not always the field's.
    const auto after_name = row.reason.find(": ");
    result = FieldFault{kFields.at(row.column - 1).name, row.reason.substr(after_name + 2)};
  }
  std::variant<Row, FieldFault> result;
};

RawRow raw_row(const ToldIntervention& told) {
  RawRow raw;
  raw.fields[static_cast<std::size_t>(Column::kind)].text = "intervention";
  for (std::uint32_t i = 0; i < kFields.size(); ++i)
    raw.fields[static_cast<std::size_t>(kFields.at(i).column)] = {told.*kFields.at(i).text, i + 1};
  return raw;
}

}  // namespace

InterventionReader::InterventionReader(std::shared_ptr<const Settings> settings,
                                       const std::vector<IntakeSettings>& intake)
    : settings_(std::move(settings)) {
  for (const IntakeSettings& of : intake)
    clocks_.push_back({std::make_shared<const LocalZone>(of.zone), of.not_before});
}

std::variant<Row, FieldFault> InterventionReader::read(const ToldIntervention& told, Instant now) const {
  const auto& analyzers = settings_->analyzers;
  const auto found = std::find_if(analyzers.begin(), analyzers.end(),
                                  [&](const Analyzer& analyzer) { return analyzer.id == told.analyzer; });
  if (found == analyzers.end()) {
    std::vector<std::string_view> known;
    known.reserve(analyzers.size());
    for (const Analyzer& analyzer : analyzers) known.emplace_back(analyzer.id);
    return FieldFault{"analyzer",
                      in_quotes(told.analyzer) + " is not known; " + known_hint(told.analyzer, known)};
  }
  const AnalyzerIndex analyzer{static_cast<std::uint32_t>(found - analyzers.begin())};
  const Clock& clock = clocks_.at(analyzer.value);
  ToldIntervention dated = told;
  if (dated.at.empty()) dated.at = to_rfc3339(now);
  OneRow row;
  RowMaker({*settings_, analyzer, standards_of(*settings_, analyzer), clock.zone, clock.not_before, now})
      .make(raw_row(dated), row);
  return std::move(row.result);
}

}  // namespace agreed
