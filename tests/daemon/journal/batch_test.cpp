// The life of a batch: all or nothing, and the same after the journal is opened again.
#include <algorithm>

#include <SQLiteCpp/SQLiteCpp.h>
#include <doctest/doctest.h>

#include "scratch.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {

void one_of_everything(Journal& journal, std::int64_t shift) {
  const auto file = journal.add_file(file_of("sha-" + std::to_string(shift)));
  journal.add_reading(file, check("wheat-low", shift, 10.62));
  journal.add_reading(file, check("wheat-low", shift, 10.62));
  JournalReading above = split("S-1", shift, 20);
  above.censored = 1;
  above.analyzer = "line2";
  journal.add_reading(file, above);
  journal.add_reading(file, check("wheat-high", shift, 13.1));
  journal.add_void(file, check("wheat-high", shift, 0));
  journal.add_rejected_row(file, 3, 2, std::string("a\0b", 3), "not a number: a");
  journal.add_intervention(file, {0, "line1", "", "", "repaired", "J. Miller", "lamp", at(shift)});
  journal.finish_file(file, "done", "");
  journal.add_finding(at(shift), "check_overdue", "line1", "{}");
  journal.add_transition({shift + 1, at(shift), "opened", R"({"state":"open"})"});
  const auto message = journal.add_message({0, "msg_" + std::to_string(shift), "engineer",
                                            "agreed.alert.opened", "{}", shift + 1, at(shift), at(shift), 0});
  journal.add_try({message, at(shift), 500, "500", false, false, at(shift + 5)});
  journal.add_configuration("site: Harrow Mill", "c0ffee", at(shift));
}

}  // namespace

TEST_CASE("a rolled-back batch leaves no trace, in the totals, the ids, the names or the file") {
  const ScratchFolder folder, untouched;
  Journal journal(folder.path()), other(untouched.path());
  for (Journal* each : {&journal, &other}) {
    each->begin(at(10));
    one_of_everything(*each, 0);
    each->commit();
  }
  const auto totals = journal.totals();
  const auto head = journal.head();

  journal.begin(at(20));
  one_of_everything(journal, 100);
  JournalReading third = check("wheat-low", 0, 1);
  third.analyzer = "line3";
  journal.add_reading(1, third);
  CHECK(journal.totals() != totals);
  CHECK(journal.last_measured("line1") == at(100));
  journal.rollback();

  CHECK(journal.totals() == totals);
  CHECK(journal.head().sha256 == head.sha256);
  CHECK(journal.last_measured("line1") == at(0));
  CHECK_FALSE(journal.last_measured("line3").has_value());
  CHECK_FALSE(journal.knows_content("line1", "sha-100"));
  CHECK(checks_of(journal, "wheat-low").size() == 1);

  for (Journal* each : {&journal, &other}) {
    each->begin(at(30));
    CHECK(each->add_file(file_of("next")) == 2);
    CHECK(each->add_message({0, "msg_next", "engineer", "agreed.test", "{}", 0, at(30), at(30), 0}) == 2);
    each->commit();
  }
  CHECK(journal.totals() == other.totals());
}

TEST_CASE("opened again, the journal says the same") {
  const ScratchFolder folder;
  IntakeTotals totals;
  ChainHead head;
  std::string source;
  {
    Journal journal(folder.path());
    source = journal.source();
    CHECK(source.starts_with("urn:uuid:"));
    CHECK(source.size() == 45);
    CHECK(journal.head().sequence == 0);
    for (int i = 0; i < 3; ++i) {
      journal.begin(at(1000 + i));
      one_of_everything(journal, i);
      journal.commit();
    }
    totals = journal.totals();
    head = journal.head();
  }
  Journal journal(folder.path());
  CHECK(journal.totals() == totals);
  CHECK(totals.files_done == 3);
  CHECK(totals.readings_accepted == 9);
  CHECK(totals.readings_repeated == 3);
  CHECK(totals.readings_rejected == 3);
  CHECK(totals.readings_voided == 3);
  CHECK(totals.readings_censored == 3);
  CHECK(totals.last_commit_at == at(1002));
  CHECK(journal.head().sequence == 3);
  CHECK(journal.head().sha256 == head.sha256);
  CHECK(journal.source() == source);
  CHECK(journal.last_measured("line1") == at(2));
  const auto transitions = journal.last_transitions();
  REQUIRE(transitions.size() == 3);
  CHECK(transitions[2].alert == 3);
  CHECK(transitions[2].change == "opened");
  CHECK(transitions[2].at == at(2));
  CHECK(transitions[2].body == R"({"state":"open"})");
  const auto interventions = journal.interventions();
  REQUIRE(interventions.size() == 3);
  CHECK(interventions[0].kind == "repaired");
  CHECK(interventions[0].by == "J. Miller");
}

TEST_CASE("a batch cut off by the end of the program is as if it had never begun") {
  const ScratchFolder folder;
  {
    Journal journal(folder.path());
    journal.begin(at(0));
    one_of_everything(journal, 0);
  }
  const Journal journal(folder.path());
  CHECK(journal.totals() == IntakeTotals{});
  CHECK(journal.head().sequence == 0);
}

TEST_CASE("an empty batch adds nothing to the chain") {
  const ScratchFolder folder;
  Journal journal(folder.path());
  const auto head = journal.head();
  journal.begin(at(0));
  journal.commit();
  CHECK(journal.head().sequence == 0);
  CHECK(journal.head().sha256 == head.sha256);
  CHECK_FALSE(journal.totals().last_commit_at.has_value());
}

TEST_CASE("a batch that takes nothing in does not move the time of the last intake") {
  const ScratchFolder folder;
  {
    Journal journal(folder.path());
    journal.begin(at(0));
    journal.finish_file(journal.add_file(file_of("a")), "rejected", "empty");
    journal.commit();
    journal.begin(at(5));
    journal.add_finding(at(5), "check_overdue", "line1", "{}");
    journal.commit();
    CHECK(journal.totals().last_commit_at == at(0));
  }
  const Journal journal(folder.path());
  CHECK(journal.totals().last_commit_at == at(0));
  CHECK(journal.totals().files_rejected == 1);
}

TEST_CASE("known content: read to its end from the same analyzer without a rejected row") {
  const ScratchFolder folder;
  Journal journal(folder.path());
  journal.begin(at(0));
  const auto good = journal.add_file(file_of("good"));
  CHECK_FALSE(journal.knows_content("line1", "good"));
  journal.finish_file(good, "done", "");
  CHECK(journal.knows_content("line1", "good"));
  CHECK_FALSE(journal.knows_content("line2", "good"));
  const auto bad = journal.add_file(file_of("bad"));
  journal.add_rejected_row(bad, 2, 1, "x", "no number");
  journal.finish_file(bad, "done", "");
  journal.finish_file(journal.add_file(file_of("useless")), "rejected", "no header");
  CHECK_FALSE(journal.knows_content("line1", "bad"));
  CHECK_FALSE(journal.knows_content("line1", "useless"));
  journal.finish_file(journal.add_file(file_of("good")), "repeated", "");
  CHECK(journal.totals().files_repeated == 1);
}

TEST_CASE("an intervention is known by its key, wherever it came from") {
  const ScratchFolder folder;
  Journal journal(folder.path());
  journal.begin(at(0));
  JournalIntervention lamp{0, "line2", "", "", "consumable_changed", "A", "lamp", at(50)};
  CHECK(journal.add_intervention(0, lamp));
  lamp.note = "the same told otherwise";
  CHECK_FALSE(journal.add_intervention(journal.add_file(file_of("x", "line2")), lamp));
  lamp.at = at(40);
  CHECK(journal.add_intervention(0, lamp));
  const auto all = journal.interventions();
  REQUIRE(all.size() == 2);
  CHECK(all[0].at == at(40));
  CHECK(all[1].note == "lamp");
  lamp.at = at(50);
  const auto known = journal.find_intervention(lamp);
  REQUIRE(known.has_value());
  CHECK(known->id == all[1].id);
  CHECK(known->by == "A");
  CHECK(known->note == "lamp");
  lamp.measurand = "protein";
  CHECK_FALSE(journal.find_intervention(lamp).has_value());
}

TEST_CASE("a finished file cannot be finished twice, and the batch that tries is gone") {
  const ScratchFolder folder;
  Journal journal(folder.path());
  journal.begin(at(0));
  const auto file = journal.add_file(file_of("a"));
  journal.finish_file(file, "done", "");
  CHECK_THROWS_AS(journal.finish_file(file, "done", ""), JournalError);
  CHECK(journal.totals() == IntakeTotals{});
}

TEST_CASE("rows of a file that is not there are refused") {
  const ScratchFolder folder;
  Journal journal(folder.path());
  journal.begin(at(0));
  CHECK_THROWS_AS(journal.add_reading(7, check("wheat-low", 0, 1)), JournalError);
  journal.begin(at(0));
  CHECK_THROWS_AS(journal.add_rejected_row(7, 1, 1, "", ""), JournalError);
  CHECK_NOTHROW(journal.begin(at(0)));
}

TEST_CASE("the log is written back between batches, so that it does not grow with what was ever written") {
  const ScratchFolder folder;
  Journal journal(folder.path());
  const std::string body(1'000'000, 'x');
  std::uintmax_t longest = 0;
  for (int i = 0; i < 60; ++i) {
    journal.begin(at(i));
    journal.add_finding(at(i), "check_standard_unstable", "{}", body);
    journal.commit();
    journal.write_back(false);
    longest = std::max(longest, std::filesystem::file_size(folder.database().string() + "-wal"));
  }
  CHECK(longest < 20'000'000);
  CHECK(std::filesystem::file_size(folder.database()) > 40'000'000);
}

TEST_CASE("a reader without end keeps the log from being written back, and that is told") {
  const ScratchFolder folder;
  Journal journal(folder.path());
  const std::string body(5'000'000, 'x');
  const auto add = [&] {
    journal.begin(at(0));
    journal.add_finding(at(0), "check_standard_unstable", "{}", body);
    journal.commit();
    journal.write_back(false);
  };
  add();
  SQLite::Database other(folder.database().string());
  other.exec("BEGIN");
  CHECK(other.execAndGet("SELECT count(*) FROM findings").getInt() == 1);
  for (int i = 0; i < 30; ++i) add();
  CHECK(journal.overlong_log_bytes().value_or(0) > 130'000'000);
  other.exec("COMMIT");
  for (int i = 0; i < 6; ++i) add();
  CHECK_FALSE(journal.overlong_log_bytes().has_value());
}
