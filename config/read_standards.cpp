// Check standards, their lots, and the charts that follow from them.
#include <algorithm>
#include <map>
#include <set>
#include <tuple>
#include <utility>

#include "config/chart_layers.hpp"
#include "config/parts.hpp"
#include "config/value_text.hpp"

namespace agreed::settings_file {
namespace {

constexpr Duration kEveryIfNotGiven = std::chrono::hours(8);  // for the alarm budget only

void warn_of_short_run_length(const Section& charts) {
  const auto length = charts.number("in_control_run_length");
  if (length && *length < kShortRunLength)
    charts.warning("in_control_run_length", "found " + shown(*length) +
                                                ", expected at least 1000 readings: false "
                                                "alerts would have to be answered by hand");
}

std::optional<ReferenceValue> reference_value(const Section& measurand) {
  const auto value = measurand.number("reference");
  const auto uncertainty = measurand.number("expanded_uncertainty");
  if (uncertainty && !measurand.given("reference"))
    measurand.error("expanded_uncertainty",
                    "found without reference, expected the reference value it belongs to");
  if (!value) return std::nullopt;
  return ReferenceValue{*value, uncertainty, measurand.number("coverage_factor").value_or(2)};
}

/// The reference values under a section's `measurands`, by measurand id; unknown measurands are errors.
using References = std::map<std::string, std::optional<ReferenceValue>>;
References references_of(const Section& section, const std::vector<std::string>& known) {
  References references;
  for (const Section& measurand : section.named("measurands")) {
    const bool is_known = std::find(known.begin(), known.end(), measurand.id()) != known.end();
    if (!is_known) measurand.error_here("unknown measurand; " + not_one_of(measurand.id(), known));
    const auto value = reference_value(measurand);
    if (is_known) references.emplace(measurand.id(), value);
  }
  return references;
}

struct LotOfAll {
  std::string id;
  std::optional<Instant> from;
  References references;
};

void check_order(const std::vector<Section>& sections, const std::vector<LotOfAll>& lots) {
  std::set<std::string> seen;
  for (std::size_t i = 0; i < lots.size(); ++i) {
    if (!lots[i].id.empty() && !seen.insert(lots[i].id).second)
      sections[i].error("lot", "found " + shown(lots[i].id) + " twice, expected lots of different names");
    if (i == 0) continue;
    if (!sections[i].given("from"))
      sections[i].error("from", "missing; expected the time from which on this lot was in use");
    if (lots[i].from && lots[i - 1].from && *lots[i].from <= *lots[i - 1].from)
      sections[i].error("from", "found " + shown(sections[i].text("from").value_or("")) +
                                    ", expected a time after the lot before it: oldest first");
  }
}

std::vector<LotOfAll> lots_of(const Section& standard, const std::vector<std::string>& measurands) {
  const References own = references_of(standard, measurands);
  const std::vector<Section> sections = standard.list("lots");
  if (sections.empty()) return {{standard.text("lot").value_or(""), std::nullopt, own}};
  if (standard.given("lot")) standard.error("lot", "found beside lots, expected one of the two");
  std::vector<LotOfAll> lots;
  for (const Section& section : sections) {
    for (const Section& measurand : section.named("measurands"))
      if (measurand.given("charts"))
        measurand.error("charts", "found in a lot, expected under the check standard's own measurands");
    const References of_lot = section.given("measurands") ? references_of(section, measurands) : own;
    lots.push_back({section.text("lot").value_or(""), section.time("from"), of_lot});
  }
  check_order(sections, lots);
  return lots;
}

std::set<std::string> watched(const Section& standard, const std::vector<LotOfAll>& lots) {
  std::set<std::string> ids;
  for (const Section& measurand : standard.named("measurands")) ids.insert(measurand.id());
  for (const LotOfAll& lot : lots)
    for (const auto& [id, reference] : lot.references) ids.insert(id);
  if (ids.empty() && !standard.given("lots"))
    standard.error("measurands", "missing; expected at least one measurand, such as {protein: {}}");
  if (ids.empty() && standard.given("lots"))
    standard.error("lots", "found no measurand, expected at least one, here or under measurands");
  return ids;
}

std::vector<std::string> analyzers_of(const Section& standard, const Settings& settings) {
  auto all = ids_of(settings.analyzers);
  if (!standard.given("analyzers")) return all;
  if (standard.is_empty_list("analyzers"))
    standard.error("analyzers",
                   "found no analyzer, expected at least one; leave the key out for all of them");
  return known_ids(standard, "analyzers", all);
}

std::vector<Lot> lots_for(const std::vector<LotOfAll>& lots, const std::string& measurand) {
  std::vector<Lot> result;
  for (const LotOfAll& lot : lots) {
    const auto found = lot.references.find(measurand);
    const auto reference = found == lot.references.end() ? std::nullopt : found->second;
    result.push_back({lot.id, lot.from, reference});
  }
  return result;
}

ChartSettings chart_from(const Section& standard, const ChartLayers& defaults) {
  ChartSettings chart;
  chart.method = method_of(defaults);
  chart.baseline = defaults.whole_number("baseline", chart.baseline);
  chart.split_memory = defaults.whole_number("split_memory", chart.split_memory);
  chart.clear_after = defaults.whole_number("clear_after", chart.clear_after);
  chart.own_run_length = defaults.run_length();
  chart.overdue = standard.usable("every");
  chart.every = standard.duration("every").value_or(kEveryIfNotGiven);
  return chart;
}

struct ChartDraft {
  ChartSettings chart;
  std::optional<Section> method;  ///< where a classical one says so
};

ChartDraft draft_of(const Section& standard, const ChartLayers& layers) {
  ChartDraft draft{chart_from(standard, layers), std::nullopt};
  if (draft.chart.method == ChartMethod::classical) {
    draft.chart.classical = read_classical(layers);
    draft.chart.own_run_length.reset();
    draft.method = layers.from("method");
  }
  return draft;
}

/// The charts of one check standard. `general`: the settings for all.
void add_charts(const Section& top, const Section& standard, const Section& general, StandardIndex index,
                const Settings& settings, std::vector<ChartDraft>& charts) {
  const auto lots = lots_of(standard, ids_of(settings.measurands));
  const auto measurands = watched(standard, lots);
  const auto analyzers = analyzers_of(standard, settings);
  for (const Section& measurand : top.named("measurands")) {
    if (measurands.count(measurand.id()) == 0) continue;
    const ChartLayers layers = layers_of(standard, measurand.id(), general);
    const ChartDraft draft = draft_of(standard, layers);
    for (const std::string& analyzer : analyzers) {
      ChartSettings chart = draft.chart;
      chart.standard = index;
      chart.analyzer = index_of<AnalyzerIndex>(settings.analyzers, analyzer).value();
      chart.measurand = index_of<MeasurandIndex>(settings.measurands, measurand.id()).value();
      chart.smallest_shift = measurand.number("smallest_shift");
      chart.lots = lots_for(lots, measurand.id());
      charts.push_back({std::move(chart), draft.method});
    }
  }
}

}  // namespace

void read_standards(const Section& top, Draft& draft) {
  const Section general = top.section("charts");
  warn_of_short_run_length(general);
  std::vector<ChartDraft> charts;
  for (const Section& standard : top.named("check_standards")) {
    const Section own = standard.section("charts");
    warn_of_short_run_length(own);
    for (const Section& measurand : standard.named("measurands"))
      warn_of_short_run_length(measurand.section("charts"));
    const StandardIndex index{static_cast<std::uint32_t>(draft.settings.standards.size())};
    draft.settings.standards.push_back({standard.id(), standard.text("title").value_or(standard.id())});
    add_charts(top, standard, general, index, draft.settings, charts);
  }
  check_classical(top);
  std::sort(charts.begin(), charts.end(), [](const ChartDraft& a, const ChartDraft& b) {
    return std::tie(a.chart.analyzer, a.chart.standard, a.chart.measurand) <
           std::tie(b.chart.analyzer, b.chart.standard, b.chart.measurand);
  });
  for (ChartDraft& chart : charts) {
    draft.settings.charts.push_back(std::move(chart.chart));
    draft.chart_methods.push_back(std::move(chart.method));
  }
}

}  // namespace agreed::settings_file
