// What the engine makes of pieces, failures and restarts: nothing is lost, nothing counts twice.
#include "daemon/engine/engine.hpp"

#include <algorithm>
#include <cmath>
#include <thread>

#include <doctest/doctest.h>

#include "core/alert/details.hpp"
#include "mill_engine.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {

constexpr std::uint32_t kLowOnLine1 = 1;  // charts: by analyzer, standard, measurand

/// Three pieces of one file: good rows, a bad one and a conflict in the first and the last.
std::vector<FilePiece> three_pieces() {
  std::vector<FilePiece> pieces;
  for (std::uint32_t i = 0; i < 3; ++i) {
    FilePiece piece = file("day.csv", {check(10 * i, 10.6), check(10 * i + 1, 10.61), check(10 * i, 10.7)});
    piece.piece = i;
    piece.last = i == 2;
    for (Row& row : piece.rows) row.line += 10 * i;
    if (i != 1) piece.bad = {bad_row(10 * i + 9)};
    pieces.push_back(piece);
  }
  return pieces;
}

const Alert* find(const Snapshot& snapshot, AlertKind kind) {
  const auto found = std::find_if(snapshot.alerts.begin(), snapshot.alerts.end(),
                                  [&](const SharedAlert& alert) { return alert->kind == kind; });
  return found == snapshot.alerts.end() ? nullptr : found->get();
}

void check_same_alerts(const Snapshot& a, const Snapshot& b) {
  REQUIRE(a.alerts.size() == b.alerts.size());
  for (std::size_t i = 0; i < a.alerts.size(); ++i) {
    CHECK(a.alerts[i]->kind == b.alerts[i]->kind);
    CHECK(a.alerts[i]->id == b.alerts[i]->id);
    CHECK(a.alerts[i]->details == b.alerts[i]->details);
  }
}

void check_same_outcome(const Snapshot& a, const Snapshot& b) {
  IntakeTotals expected = a.totals, found = b.totals;
  expected.last_commit_at = found.last_commit_at = {};
  CHECK(found == expected);
  CHECK(found.readings_accepted == 6);
  CHECK(found.readings_rejected == 5);
  CHECK(found.readings_repeated == 0);
  check_same_alerts(a, b);
}

}  // namespace

TEST_CASE(
    "a batch that fails at its commit leaves nothing behind, and its file counts once when it comes again") {
  Mill mill;
  mill.start();
  mill.give(file("first.csv", {check(0, 10.6)}, {bad_row(3)}));
  const auto before = mill.now()->alerts;
  mill.break_journal();
  mill.engine->report({0}, {true, "", 1, true});
  CHECK_THROWS_WITH(mill.give(file("second.csv", {check(1, 10.61)}, {bad_row(3)})),
                    doctest::Contains("broken by the test"));
  auto snapshot = mill.now();
  CHECK_FALSE(snapshot->ready);
  CHECK(snapshot->started);
  REQUIRE(snapshot->not_ready.size() == 1);
  CHECK(snapshot->not_ready[0].find("broken by the test") != std::string::npos);
  CHECK(snapshot->totals.readings_accepted == 1);
  CHECK(snapshot->alerts == before);
  CHECK(mill.values(kLowOnLine1) == std::vector<double>{10.6});
  CHECK(mill.engine->acknowledge(1, "Ann", "").get().outcome == AskOutcome::unavailable);

  mill.repair_journal();
  CHECK(mill.give(file("second.csv", {check(1, 10.61)}, {bad_row(3)})).outcome == FileOutcome::done);
  snapshot = mill.now();
  CHECK(snapshot->ready);
  CHECK(snapshot->totals.readings_accepted == 2);
  CHECK(snapshot->totals.readings_rejected == 2);
  CHECK(mill.values(kLowOnLine1) == std::vector<double>{10.6, 10.61});
  REQUIRE(snapshot->alerts.size() == 1);
  const Details& details = snapshot->alerts[0]->details;
  const auto files = std::find_if(details.begin(), details.end(),
                                  [](const auto& detail) { return detail.first == "files"; });
  CHECK(std::get<std::vector<std::string>>(files->second) ==
        std::vector<std::string>{"first.csv", "second.csv"});
}

TEST_CASE("as long as files wait, only a written batch ends the trouble; when none waits, a look does") {
  Mill mill;
  mill.start();
  mill.break_journal();
  mill.engine->report({0}, {true, "", 1, true});
  CHECK_THROWS((void)mill.give(file("a.csv", {check(0, 10.6)})));
  mill.engine->report({0}, {true, "", 1, true});  // wakes the engine: an empty batch can be committed
  std::this_thread::sleep_for(std::chrono::milliseconds(100));
  CHECK_FALSE(mill.now()->ready);
  mill.engine->report({0}, {true, "", 0, true});
  CHECK(eventually([&] { return mill.now()->ready; }));
}

TEST_CASE("the trouble lasts until the file that was refused is taken in whole") {
  Mill mill;
  mill.start();
  mill.break_journal();
  CHECK_THROWS((void)mill.give(three_pieces()[0]));  // no report has counted it as waiting
  mill.repair_journal();
  mill.give(three_pieces()[0]);
  mill.give(three_pieces()[1]);
  CHECK_FALSE(mill.now()->ready);
  mill.give(file("other.csv", {check(90, 10.6)}));
  CHECK_FALSE(mill.now()->ready);
  mill.give(three_pieces()[2]);
  CHECK(mill.now()->ready);
}

TEST_CASE("a file interrupted by a crash between two of its batches ends as if nothing had been") {
  Mill undisturbed, crashed;
  undisturbed.start();
  for (const FilePiece& piece : three_pieces()) undisturbed.give(piece);

  crashed.start();
  for (std::size_t taken = 1; taken <= 2; ++taken) {
    for (std::size_t i = 0; i < taken; ++i)
      CHECK(crashed.give(three_pieces()[i]).outcome == FileOutcome::more);
    crashed.start();
  }
  for (const FilePiece& piece : three_pieces()) crashed.give(piece);
  check_same_outcome(*undisturbed.now(), *crashed.now());
  CHECK(crashed.values(kLowOnLine1) == undisturbed.values(kLowOnLine1));
}

TEST_CASE("a file that a crash kept from being moved counts once, one given again counts again") {
  Mill undisturbed, crashed;
  undisturbed.start();
  crashed.start();
  for (const FilePiece& piece : three_pieces()) {
    undisturbed.give(piece);
    crashed.give(piece);
  }
  const FilePiece clean = file("clean.csv", {check(50, 10.6)});
  CHECK(crashed.give(clean).outcome == FileOutcome::done);
  const auto before = crashed.now()->totals;
  crashed.start();
  for (const FilePiece& piece : three_pieces())
    CHECK(crashed.give(piece).outcome == (piece.last ? FileOutcome::done : FileOutcome::more));
  CHECK(crashed.give(clean).outcome == FileOutcome::repeated);
  CHECK(crashed.now()->totals.files_done == before.files_done);
  CHECK(crashed.now()->totals.files_repeated == 0);
  CHECK(crashed.now()->totals.readings_rejected == before.readings_rejected);
  CHECK(crashed.now()->totals.readings_repeated == 0);
  check_same_alerts(*undisturbed.now(), *crashed.now());

  for (FilePiece piece : three_pieces()) {
    piece.file.mtime_ns = 2;  // written again
    crashed.give(piece);
  }
  CHECK(crashed.now()->totals.files_done == before.files_done + 1);
  CHECK(crashed.now()->totals.readings_rejected == 2 * before.readings_rejected);
}

TEST_CASE("a rejected file that is moved back is a new one") {
  Mill mill;
  mill.start();
  for (int i = 1; i <= 2; ++i) {
    CHECK(mill.give(file("bad.csv", {}, {bad_row(2)})).outcome == FileOutcome::rejected);
    CHECK(mill.now()->totals.files_rejected == i);
  }
}

TEST_CASE("a rejected file that a crash kept from being moved is the same one, and told once") {
  Mill mill;
  mill.start();
  FilePiece piece = file("bad.csv", {}, {bad_row(2)});
  piece.file.status_ns = 1;  // not renamed since it was committed
  for (int i = 0; i < 2; ++i) {
    CHECK(mill.give(piece).outcome == FileOutcome::rejected);
    CHECK(mill.now()->totals.files_rejected == 1);
    CHECK(mill.now()->totals.readings_rejected == 1);
    CHECK(number_in(find(*mill.now(), AlertKind::file_rejected)->details, "count") == 1.0);
  }
}

TEST_CASE("after a failed commit the later pieces of its file are refused until it is read from its start") {
  Mill undisturbed, mill;
  undisturbed.start();
  for (const FilePiece& piece : three_pieces()) undisturbed.give(piece);
  mill.start();
  mill.give(three_pieces()[0]);
  mill.break_journal();
  CHECK_THROWS((void)mill.give(three_pieces()[1]));
  mill.repair_journal();
  CHECK_THROWS_AS((void)mill.give(three_pieces()[2]), PieceOutOfOrder);
  for (const FilePiece& piece : three_pieces()) mill.give(piece);
  check_same_outcome(*undisturbed.now(), *mill.now());
}

TEST_CASE("a large file given again is passed over to its last piece") {
  Mill mill;
  mill.start();
  std::vector<FilePiece> pieces;
  for (std::uint32_t i = 0; i < 3; ++i) {
    pieces.push_back(file("large.csv", {check(i, 10.6)}));
    pieces.back().piece = i;
    pieces.back().last = i == 2;
  }
  for (const FilePiece& piece : pieces) mill.give(piece);
  for (FilePiece& piece : pieces) piece.file.name = "copy.csv";
  CHECK(mill.give(pieces[0]).outcome == FileOutcome::more);
  mill.start();  // and a crash between is made good
  for (const FilePiece& piece : pieces)
    CHECK(mill.give(piece).outcome == (piece.last ? FileOutcome::repeated : FileOutcome::more));
  CHECK(mill.now()->totals.files_done == 1);
  CHECK(mill.now()->totals.files_repeated == 1);
  CHECK(mill.now()->totals.readings_accepted == 3);
  CHECK(mill.now()->totals.readings_repeated == 0);
}

TEST_CASE("a void that matches nothing is a rejected row, one that is repeated is not") {
  Mill mill;
  mill.start();
  mill.give(file("a.csv", {check(0, 10.6), check(1, 10.7)}));
  const PieceAnswer answer = mill.give(file("typo.csv", {take_back(check(2, 0))}));
  CHECK(answer.outcome == FileOutcome::rejected);
  CHECK(answer.reason.find("nothing was taken back") != std::string::npos);
  CHECK(find(*mill.now(), AlertKind::file_rejected) != nullptr);
  CHECK(mill.give(file("b.csv", {take_back(check(1, 0))})).outcome == FileOutcome::done);
  CHECK(mill.give(file("c.csv", {take_back(check(1, 0))})).outcome == FileOutcome::done);
  CHECK(mill.values(kLowOnLine1) == std::vector<double>{10.6});
  CHECK(mill.now()->totals.readings_voided == 1);
}

TEST_CASE("a file with a reading, its void and its correction says the same however often it is read") {
  const std::vector<Row> rows = {check(0, 10.6), take_back(check(0, 0)), check(0, 10.7)};
  Mill mill;
  mill.start();
  mill.give(file("day.csv", rows, {bad_row(9)}, "content"));
  CHECK(mill.values(kLowOnLine1) == std::vector<double>{10.7});
  SUBCASE("the same content") {
    mill.give(file("copy.csv", rows, {bad_row(9)}, "content"));
  }
  SUBCASE("it has grown since") {
    auto more = rows;
    more.push_back(check(-1, 10.5));
    FilePiece grown = file("day.csv", more, {}, "grown content");
    grown.file.size = 130;
    mill.give(grown);
    mill.give(file("late.csv", {take_back(check(-1, 0))}));
  }
  CHECK(mill.values(kLowOnLine1) == std::vector<double>{10.7});
  mill.start();
  CHECK(mill.values(kLowOnLine1) == std::vector<double>{10.7});
}

TEST_CASE("a conflict is told once, and again only for another reading of it") {
  Mill mill;
  mill.start();
  mill.give(file("a.csv", {check(0, 10.6)}));
  CHECK(mill.give(file("b.csv", {check(0, 10.7)})).outcome == FileOutcome::rejected);
  CHECK(mill.values(kLowOnLine1) == std::vector<double>{10.6});
  const Alert* alert = find(*mill.now(), AlertKind::readings_conflict);
  REQUIRE(alert != nullptr);
  CHECK(mill.engine->acknowledge(alert->id, "Ann", "a typing error").get().outcome == AskOutcome::done);
  mill.start();
  CHECK(find(*mill.now(), AlertKind::readings_conflict) == nullptr);
}

TEST_CASE("a reminder due with the batch that ends its alert does not open it again") {
  Mill mill;
  mill.config.alert_policy.remind_every = std::chrono::milliseconds(1);
  mill.start();
  mill.give(file("bad.csv", {check(0, 10.6)}, {bad_row(3)}));
  std::this_thread::sleep_for(std::chrono::milliseconds(5));
  CHECK(mill.engine->acknowledge(1, "Ann", "seen").get().outcome == AskOutcome::done);
  CHECK(mill.now()->alerts.empty());
  mill.start();
  CHECK(mill.now()->alerts.empty());
}

TEST_CASE("an intervention by file counts once and begins a stretch; an accepted level keeps the readings") {
  Mill mill;
  mill.start();
  std::vector<Row> rows;
  for (int i = 0; i < 12; ++i) rows.push_back(check(i, 10.6 + 0.01 * (i % 3)));
  mill.give(file("a.csv", rows));
  mill.give(file("b.csv", {intervention(12, InterventionKind::recalibrated)}));
  mill.give(file("c.csv", {intervention(12, InterventionKind::recalibrated), check(13, 10.61)}));
  mill.give(file("d.csv", {intervention(14, InterventionKind::level_accepted), check(15, 10.61)}));
  const ChartView view = *mill.now()->charts[kLowOnLine1];
  CHECK(view.points.size() == 14);
  CHECK(std::count_if(view.points.begin(), view.points.end(),
                      [](const ChartPoint& p) { return p.starts_stretch; }) >= 2);
  mill.start();
  CHECK(*mill.now()->charts[kLowOnLine1] == view);
}

TEST_CASE("an alert about what is no longer configured resolves, its readings are kept and come back") {
  Mill mill;
  mill.start();
  std::vector<Row> rows;
  for (int i = 0; i < 60; ++i)
    rows.push_back(check(i, (i < 40 ? 13.4 : 14.4) + 0.02 * std::sin(7.0 * i), "wheat-high"));
  mill.give(file("a.csv", rows));
  REQUIRE(find(*mill.now(), AlertKind::check_standard_unstable) != nullptr);
  const ChartView before = *mill.now()->charts[0];

  mill.configure(one_standard());
  mill.start();
  CHECK(mill.now()->alerts.empty());
  CHECK(mill.now()->totals.readings_accepted == 60);
  const auto told =
      JournalReader(mill.config.state).alerts({.states = {"resolved"}, .since = {}, .limit = 10});
  REQUIRE(told.size() == 1);
  CHECK(told[0].body.find("configuration_changed") != std::string::npos);

  mill.configure(kBothStandards);
  mill.start();
  CHECK(*mill.now()->charts[0] == before);
  CHECK(find(*mill.now(), AlertKind::check_standard_unstable) != nullptr);
}

TEST_CASE("an outlier's alert outlives restarts and late data, also when 500 newer pairs are there") {
  Mill mill;
  mill.start();
  std::vector<Row> rows;
  const auto noise = [](int i) { return 0.02 * std::sin(12.9898 * i); };
  for (int i = 0; i < 60; ++i)
    for (std::uint32_t a = 0; a < 2; ++a)
      rows.push_back(check(0.1 * i, 10.6 + noise(7 * i + static_cast<int>(a)), "wheat-low", a));
  for (int i = 0; i < 700; ++i) {
    const double truth = 11.8 + 1.8 * std::sin(0.7 * i);
    const std::string sample = "S-" + std::to_string(i);
    rows.push_back(split(10 + i, 0, sample, truth + noise(3 * i)));
    rows.push_back(split(10 + i, 1, sample, truth + noise(5 * i + 1) + (i == 80 ? 1.5 : 0)));
  }
  mill.give(file("a.csv", rows));
  const Alert* alert = find(*mill.now(), AlertKind::pair_outlier);
  REQUIRE(alert != nullptr);
  mill.start();
  CHECK(find(*mill.now(), AlertKind::pair_outlier) != nullptr);
  mill.give(file("late.csv", {check(0.05, 10.6)}));
  REQUIRE(find(*mill.now(), AlertKind::pair_outlier) != nullptr);
  CHECK(mill.engine->acknowledge(find(*mill.now(), AlertKind::pair_outlier)->id, "Ann", "a mixed-up cup")
            .get()
            .outcome == AskOutcome::done);
  mill.give(file("later.csv", {check(0.06, 10.6)}));
  CHECK(find(*mill.now(), AlertKind::pair_outlier) == nullptr);
}

TEST_CASE("one batch of more than 10,000 readings: rows that carry both sides") {
  Mill mill;
  mill.start();
  std::vector<Row> rows;
  for (int i = 0; i < 10'000; ++i)
    for (std::uint32_t a = 0; a < 2; ++a)
      rows.push_back(split(0.01 * i, a, "S-" + std::to_string(i), 11.0 + 0.001 * i));
  CHECK(mill.give(file("pairs.csv", rows)).outcome == FileOutcome::done);
  CHECK(mill.now()->totals.readings_accepted == 20'000);
  CHECK(mill.now()->comparisons[0]->pairs_total == 10'000);
}

TEST_CASE("an acknowledgement of an alert that never was, or is over, is said to be so") {
  Mill mill;
  mill.start();
  CHECK(mill.engine->acknowledge(1, "Ann", "").get().outcome == AskOutcome::not_found);
  mill.give(file("bad.csv", {check(0, 10.6)}, {bad_row(3)}));
  CHECK(mill.engine->acknowledge(1, "Ann", "").get().outcome == AskOutcome::done);
  CHECK(mill.engine->acknowledge(1, "Ann", "").get().outcome == AskOutcome::not_possible);
  mill.engine->stop();
  CHECK(mill.engine->acknowledge(1, "Ann", "").get().outcome == AskOutcome::unavailable);
}
