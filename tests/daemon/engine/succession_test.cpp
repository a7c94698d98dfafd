// One engine after the other on one journal: what a reload of the configuration does.
#include <doctest/doctest.h>

#include "tests/daemon/engine/mill_engine.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {

constexpr std::size_t kLowOfBoth = 1, kLowAlone = 0;  // line1's charts with and without wheat-high

void start(Engine& engine) {
  engine.start("http://127.0.0.1", [](const std::string&) {});
}

}  // namespace

TEST_CASE("the next engine shows what the one before showed until it has folded the journal itself") {
  Mill mill;
  mill.start();
  mill.give(file("a.csv", {check(0, 10.6), check(8, 10.61)}));
  const auto before = mill.now();
  REQUIRE(before->charts.size() == 4);
  mill.engine->stop();
  mill.configure(one_standard());
  auto next = std::make_unique<Engine>(mill.config, mill.engine->leave());

  auto shown = next->snapshot();
  CHECK(shown->ready);
  CHECK(shown->config_sha256 == before->config_sha256);
  CHECK(shown->charts.size() == 4);
  REQUIRE(shown->remarks.size() == 1);
  CHECK(shown->remarks[0].find("is being taken in") != std::string::npos);

  start(*next);
  next->first_turn().wait();
  shown = next->snapshot();
  CHECK(shown->ready);
  CHECK(shown->started_at == before->started_at);
  CHECK(shown->config_sha256 != before->config_sha256);
  CHECK(shown->remarks.empty());
  REQUIRE(shown->charts.size() == 2);
  CHECK(shown->charts[kLowAlone]->points.size() == 2);
  CHECK(before->charts[kLowOfBoth]->points.size() == 2);
  CHECK(shown->totals.readings_accepted == 2);
}

TEST_CASE("a journal that cannot be written to at a reload is told beside the old picture, until it can") {
  Mill mill;
  mill.start();
  mill.give(file("a.csv", {check(0, 10.6)}));
  mill.engine->stop();
  mill.break_journal();
  mill.configure(one_standard());
  Engine next(mill.config, mill.engine->leave());
  start(next);
  next.first_turn().wait();
  auto shown = next.snapshot();
  CHECK_FALSE(shown->ready);
  REQUIRE(shown->not_ready.size() == 1);
  CHECK(shown->not_ready[0].find("broken by the test") != std::string::npos);
  CHECK(shown->charts.size() == 4);

  mill.repair_journal();
  CHECK(eventually([&] { return next.snapshot()->charts.size() == 2; }));
  CHECK(eventually([&] { return next.snapshot()->ready; }));
}

TEST_CASE("what is said of the configuration file stays among the remarks until it is taken back") {
  Mill mill;
  mill.start();
  mill.engine->remark_on_configuration("agreed.yaml:3:1: nothing good");
  CHECK(eventually([&] { return !mill.now()->remarks.empty(); }));
  mill.engine->report({0}, {true, "", 0, true});
  CHECK(mill.now()->ready);
  CHECK(mill.now()->remarks == std::vector<std::string>{"agreed.yaml:3:1: nothing good"});
  mill.engine->remark_on_configuration("");
  CHECK(eventually([&] { return mill.now()->remarks.empty(); }));
}
