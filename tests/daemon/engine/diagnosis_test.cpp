// An open alert about a changed relation follows what the check standards say.
#include <algorithm>
#include <cmath>
#include <string>

#include <doctest/doctest.h>

#include "core/alert/details.hpp"
#include "mill_engine.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {
double noise(int i) {
  return 0.02 * std::sin(12.9898 * i);
}

/// Pairs from hour 100 on, every two hours; line2 reads 0.15 higher from the 60th on.
std::vector<Row> pairs(int first, int last) {
  std::vector<Row> rows;
  for (int i = first; i < last; ++i) {
    const double truth = 11.8 + 1.8 * std::sin(0.7 * i);
    const std::string sample = "S-" + std::to_string(i);
    rows.push_back(split(100 + 2 * i, 0, sample, truth + noise(3 * i)));
    rows.push_back(split(100 + 2 * i, 1, sample, truth + noise(5 * i + 1) + (i >= 60 ? 0.15 : 0)));
  }
  return rows;
}

/// A check reading of each analyzer at an hour.
std::vector<Row> checks(double h, int i, double shift_y) {
  return {check(h, 10.6 + noise(7 * i), "wheat-low", 0),
          check(h, 10.6 + noise(11 * i + 3) + shift_y, "wheat-low", 1)};
}

const Alert& drifting(const Snapshot& snapshot) {
  const auto found =
      std::find_if(snapshot.alerts.begin(), snapshot.alerts.end(),
                   [](const SharedAlert& alert) { return alert->kind == AlertKind::agreement_drifting; });
  REQUIRE(found != snapshot.alerts.end());
  return **found;
}
}  // namespace

TEST_CASE("undecided at the signal, named as check readings come, told once, the same after a restart") {
  Mill mill;
  mill.start();
  std::vector<Row> rows;
  for (int i = 0; i < 40; ++i)
    for (Row& row : checks(2 * i + 0.5, i, 0)) rows.push_back(std::move(row));
  mill.give(file("checks.csv", rows));
  mill.give(file("pairs.csv", pairs(0, 75)));

  const Alert first = drifting(*mill.now());
  CHECK(first.severity == Severity::critical);
  CHECK(text_in(first.details, "moved") == "undecided");
  CHECK(text_in(first.details, "evidence")->find("would decide it") != std::string::npos);
  CHECK(first.text.find("not decided. Since") != std::string::npos);
  CHECK(text_in(first.details, "look_back_from_is") == "agreement_shown");
  CHECK(list_in(first.details, "look_back_samples").back() == "S-74");
  CHECK(mill.now()->comparisons[0]->diagnosis->moved == Moved::undecided);

  for (int i = 0; i < 12; ++i)
    mill.give(file("check" + std::to_string(i) + ".csv", checks(252 + i, 41 + i, 0.15)));
  const Alert named = drifting(*mill.now());
  CHECK(named.id == first.id);
  CHECK(text_in(named.details, "moved") == "y");
  CHECK(*number_in(named.details, "probability") >= 0.9);
  CHECK(named.text.find("line2 has moved (probability") != std::string::npos);
  CHECK(named.told_at == first.told_at);
  CHECK(named.changed_at > first.changed_at);
  const ComparisonView view = *mill.now()->comparisons[0];
  CHECK(view.diagnosis->moved == Moved::y);
  CHECK(view.diagnosis->y_readings_after == 12);

  mill.start();
  CHECK(drifting(*mill.now()) == named);
  CHECK(mill.now()->comparisons[0]->diagnosis == view.diagnosis);
  CHECK(mill.now()->comparisons[0]->look_back == view.look_back);
}

TEST_CASE("an alert that would say the same is left as it is") {
  Mill mill;
  mill.start();
  std::vector<Row> rows;
  for (int i = 0; i < 40; ++i)
    for (Row& row : checks(2 * i + 0.5, i, 0)) rows.push_back(std::move(row));
  for (int i = 0; i < 20; ++i)
    for (Row& row : checks(220.5 + i, 41 + i, 0.15)) rows.push_back(std::move(row));
  mill.give(file("checks.csv", rows));
  mill.give(file("pairs.csv", pairs(0, 80)));
  const Alert before = drifting(*mill.now());
  CHECK(text_in(before.details, "moved") == "y");
  const auto view = mill.now()->comparisons[0]->diagnosis;
  mill.give(file("more.csv", checks(262, 70, 0.15)));
  CHECK(drifting(*mill.now()) == before);
  CHECK(mill.now()->comparisons[0]->diagnosis->evidence != view->evidence);
}
