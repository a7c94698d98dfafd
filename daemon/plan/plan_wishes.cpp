#include "daemon/plan/plan_wishes.hpp"

#include <set>
#include <string>
#include <vector>

#include "config/nearest.hpp"
#include "daemon/cli/with_configuration.hpp"
#include "daemon/printable.hpp"

namespace agreed::plan {
namespace {

template <class Item>
std::vector<std::string> ids(const std::vector<Item>& items) {
  std::vector<std::string> names;
  names.reserve(items.size());
  for (const Item& item : items) names.push_back(item.id);
  return names;
}

/// Where `id` is among the items. `option` and `what` are for the message when it is not.
template <class Item>
std::uint32_t place_of(const std::string& id, const std::vector<Item>& items, const std::string& option,
                       const std::string& what) {
  for (std::uint32_t i = 0; i < items.size(); ++i)
    if (items[i].id == id) return i;
  const std::vector<std::string> names = ids(items);
  std::string hint = settings_file::did_you_mean(id, names);
  if (hint.empty()) hint = "; there is " + settings_file::enumerated(names);
  throw WrongUse(option + ": there is no " + what + " '" + printable(id) + "'" + hint);
}

using Sds = std::map<std::pair<AnalyzerIndex, MeasurandIndex>, double>;

Sds read_sds(const std::vector<GivenSd>& given, const Settings& settings) {
  Sds of_all, of_one;
  std::set<std::pair<std::string, std::string>> names;
  for (const GivenSd& sd : given) {
    if (!names.emplace(sd.analyzer, sd.measurand).second)
      throw WrongUse("--sd: " + printable(sd.analyzer.empty() ? "" : sd.analyzer + "/") +
                     printable(sd.measurand) + " is given twice");
    const MeasurandIndex measurand{place_of(sd.measurand, settings.measurands, "--sd", "measurand")};
    if (!sd.analyzer.empty()) {
      const AnalyzerIndex analyzer{place_of(sd.analyzer, settings.analyzers, "--sd", "analyzer")};
      of_one[{analyzer, measurand}] = sd.sd;
      continue;
    }
    for (std::uint32_t i = 0; i < settings.analyzers.size(); ++i)
      of_all[{AnalyzerIndex{i}, measurand}] = sd.sd;
  }
  of_one.merge(of_all);
  return of_one;
}

MeasurandIndex measurand_of_notice(const PlanCommand& command, const Settings& settings) {
  if (!command.measurand.empty())
    return {place_of(command.measurand, settings.measurands, "--measurand", "measurand")};
  if (settings.measurands.size() != 1)
    throw WrongUse("--notice: which measurand? Name it with --measurand; there is " +
                   settings_file::enumerated(ids(settings.measurands)));
  return {0};
}

}  // namespace

std::optional<double> Wishes::sd_of(AnalyzerIndex analyzer, MeasurandIndex measurand) const {
  const auto found = sds.find({analyzer, measurand});
  return found == sds.end() ? std::nullopt : std::optional(found->second);
}

Wishes read_wishes(const PlanCommand& command, const Settings& settings) {
  Wishes wishes;
  wishes.sds = read_sds(command.sds, settings);
  wishes.false_alerts_per_year = command.false_alerts_per_year;
  if (command.notice && command.within)
    wishes.notice =
        MeasurandNotice{measurand_of_notice(command, settings), {*command.notice, *command.within}};
  return wishes;
}

}  // namespace agreed::plan
