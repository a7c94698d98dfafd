// Names of the command line against those of the configuration.
#include "daemon/plan/plan_wishes.hpp"

#include <doctest/doctest.h>

#include "daemon/cli/with_configuration.hpp"

using namespace agreed;
using namespace agreed::plan;

namespace {

Settings mill() {
  Settings settings;
  settings.analyzers = {{"line1", ""}, {"line2", ""}};
  settings.measurands.resize(2);
  settings.measurands[0].id = "moisture";
  settings.measurands[1].id = "protein";
  return settings;
}

constexpr AnalyzerIndex kLine1{0}, kLine2{1};
constexpr MeasurandIndex kMoisture{0}, kProtein{1};

std::string told(const PlanCommand& command) {
  try {
    (void)read_wishes(command, mill());
  } catch (const WrongUse& wrong) {
    return wrong.what();
  }
  return "";
}

bool holds(const std::string& text, const char* part) {
  return text.find(part) != std::string::npos;
}

}  // namespace

TEST_CASE("an sd given for one analyzer goes before one given for all, in whatever order") {
  for (const auto& sds : {std::vector<GivenSd>{{"", "protein", 0.02}, {"line2", "protein", 0.03}},
                          std::vector<GivenSd>{{"line2", "protein", 0.03}, {"", "protein", 0.02}}}) {
    PlanCommand command;
    command.sds = sds;
    const Wishes wishes = read_wishes(command, mill());
    CHECK(wishes.sd_of(kLine1, kProtein) == 0.02);
    CHECK(wishes.sd_of(kLine2, kProtein) == 0.03);
    CHECK_FALSE(wishes.sd_of(kLine1, kMoisture));
  }
}

TEST_CASE("a name that is not configured is told the nearest, and a doubtful wish what is missing") {
  PlanCommand command;
  command.sds = {{"", "protien", 0.02}};
  CHECK(holds(told(command), "no measurand 'protien'; did you mean protein?"));
  command.sds = {{"lien1", "protein", 0.02}};
  CHECK(holds(told(command), "no analyzer 'lien1'; did you mean line1?"));
  command.sds = {{"line1", "xyz", 0.02}};
  CHECK(holds(told(command), "there is moisture, protein"));
  command.sds = {{"line1", "protein", 0.02}, {"line1", "protein", 0.02}};
  CHECK(holds(told(command), "line1/protein is given twice"));
  command.sds.clear();
  command.notice = 0.1;
  command.within = std::chrono::hours(24);
  CHECK(holds(told(command), "--measurand; there is moisture, protein"));
  command.measurand = "moisture";
  CHECK(read_wishes(command, mill()).notice->measurand == kMoisture);
}
