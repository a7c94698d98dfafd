// What read-only connections see: alerts with their record, the outbox, files.
#include <doctest/doctest.h>

#include "scratch.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {

OutboxMessage message(std::string id, std::string route, std::int64_t alert = 0) {
  return {0, std::move(id), std::move(route), "agreed.alert.opened", "{\"n\":1}", alert, at(1), at(2), 0};
}

template <class Work>
void in_batch(Journal& journal, std::int64_t now, const Work& work) {
  journal.begin(at(now));
  work();
  journal.commit();
}

}  // namespace

TEST_CASE("an alert comes with its newest body, its history and its deliveries") {
  const ScratchFolder folder;
  Journal journal(folder.path());
  JournalReader reader(folder.path());
  in_batch(journal, 5, [&] {
    journal.add_transition({17, at(5), "opened", R"({"state":"open"})"});
    const auto first = journal.add_message(message("msg_1", "engineer", 17));
    journal.add_message(message("msg_2", "shift", 17));
    journal.add_message(message("msg_3", "shift", 18));
    journal.add_try({first, at(6), 503, "503 Service Unavailable", false, false, at(7)});
    journal.add_try({first, at(7), 204, "", true, false, std::nullopt});
    journal.add_transition({17, at(8), "acknowledged", R"({"state":"acknowledged"})"});
  });
  CHECK_FALSE(reader.alert(18).has_value());
  const auto alert = reader.alert(17);
  REQUIRE(alert.has_value());
  CHECK(alert->body == R"({"state":"acknowledged"})");
  REQUIRE(alert->history.size() == 2);
  CHECK(alert->history[0].change == "opened");
  CHECK(alert->history[1].at == at(8));
  REQUIRE(alert->deliveries.size() == 2);
  const DeliveryRow& first = alert->deliveries[0];
  CHECK(first.message == "msg_1");
  CHECK(first.route == "engineer");
  CHECK(first.state == "delivered");
  CHECK(first.tries == 2);
  CHECK(first.last_status == 204);
  CHECK(first.delivered_at == at(7));
  CHECK_FALSE(first.next_try_at.has_value());
  CHECK(alert->deliveries[1].state == "waiting");
  CHECK(alert->deliveries[1].next_try_at == at(2));
  CHECK(alert->deliveries[1].tries == 0);
}

TEST_CASE("alerts are chosen by state, by time and by page, newest first") {
  const ScratchFolder folder;
  Journal journal(folder.path());
  JournalReader reader(folder.path());
  in_batch(journal, 0, [&] {
    for (int id = 1; id <= 5; ++id) journal.add_transition({id, at(id), "opened", R"({"state":"open"})"});
    journal.add_transition({2, at(20), "resolved", R"({"state":"resolved"})"});
    // Bodies that do not tell: the change does, and one that implies nothing keeps what was.
    journal.add_transition({3, at(21), "acknowledged", "not JSON"});
    journal.add_transition({3, at(22), "changed", "{}"});
  });
  const auto ids = [&](const AlertQuery& query) {
    std::vector<std::int64_t> found;
    for (const auto& record : reader.alerts(query)) found.push_back(record.history.front().alert);
    return found;
  };
  AlertQuery query;
  CHECK(ids(query) == std::vector<std::int64_t>{5, 4, 3, 2, 1});
  query.states = {"open"};
  CHECK(ids(query) == std::vector<std::int64_t>{5, 4, 1});
  query.states = {"acknowledged", "resolved"};
  CHECK(ids(query) == std::vector<std::int64_t>{3, 2});
  query.since = at(21);
  CHECK(ids(query) == std::vector<std::int64_t>{3});
  query = {};
  query.limit = 2;
  query.before_id = 4;
  CHECK(ids(query) == std::vector<std::int64_t>{3, 2});
}

TEST_CASE("messages of a route keep their order: the oldest not settled one comes, due or not") {
  const ScratchFolder folder;
  Journal journal(folder.path());
  JournalReader reader(folder.path());
  std::int64_t a1 = 0, a2 = 0;
  in_batch(journal, 0, [&] {
    a1 = journal.add_message(message("a1", "a", 3));
    journal.add_message(message("b1", "b"));
    a2 = journal.add_message(message("a2", "a"));
  });
  CHECK_FALSE(reader.next_message("c").has_value());
  const auto first = reader.next_message("a");
  REQUIRE(first.has_value());
  CHECK(reader.source() == journal.source());
  CHECK(first->id == a1);
  CHECK(first->webhook_id == "a1");
  CHECK(first->route == "a");
  CHECK(first->type == "agreed.alert.opened");
  CHECK(first->body == "{\"n\":1}");
  CHECK(first->alert == 3);
  CHECK(first->created_at == at(1));
  CHECK(first->due_at == at(2));

  in_batch(journal, 1, [&] { journal.add_try({a1, at(3), 0, "refused", false, false, at(600)}); });
  CHECK(reader.next_message("a")->id == a1);
  CHECK(reader.next_message("a")->due_at == at(600));
  CHECK(reader.next_message("a")->tries == 1);
  in_batch(journal, 2, [&] { journal.add_try({a1, at(600), 0, "refused", false, true, std::nullopt}); });
  CHECK(reader.next_message("a")->id == a2);
  in_batch(journal, 3, [&] { journal.add_try({a2, at(601), 200, "", true, false, std::nullopt}); });
  CHECK_FALSE(reader.next_message("a").has_value());
  CHECK(reader.next_message("b")->webhook_id == "b1");

  in_batch(journal, 4, [&] {
    CHECK(journal.ask_again("a1").answer == SendAgain::queued);
    const AskedAgain asked = journal.send_again("a1", at(700));
    CHECK(asked.answer == SendAgain::queued);
    CHECK(asked.route == "a");
    CHECK(journal.send_again("a1", at(701)).answer == SendAgain::waits_already);
    CHECK(journal.send_again("nobody", at(700)).answer == SendAgain::unknown);
  });
  CHECK(reader.next_message("a")->tries == 0);
  CHECK(reader.next_message("a")->id == a1);
  CHECK(reader.next_message("a")->due_at == at(700));
}

TEST_CASE("a message id is used once") {
  const ScratchFolder folder;
  Journal journal(folder.path());
  journal.begin(at(0));
  journal.add_message(message("same", "a"));
  CHECK_THROWS_AS(journal.add_message(message("same", "a")), JournalError);
}

TEST_CASE("files come newest first, with their counts and at most 20 of their rejected rows") {
  const ScratchFolder folder;
  Journal journal(folder.path());
  JournalReader reader(folder.path());
  std::int64_t first = 0;
  in_batch(journal, 10, [&] {
    JournalFile file = file_of("s1");
    file.name = std::string("odd\xff\nname.csv");
    first = journal.add_file(file);
    journal.add_reading(first, check("wheat-low", 0, 1));
    for (std::uint32_t line = 2; line < 30; ++line)
      journal.add_rejected_row(first, line, 3, std::string("a\0\xff", 3), "no number");
  });
  CHECK(reader.files({"", "", 10, 0}).at(0).outcome.empty());
  in_batch(journal, 20, [&] {
    journal.add_reading(first, check("wheat-low", 1, 1));
    journal.add_reading(first, check("wheat-low", 1, 1));
    journal.finish_file(first, "done", "");
    journal.finish_file(journal.add_file(file_of("s2")), "rejected", "no header");
  });
  const auto files = reader.files({"", "", 10, 0});
  REQUIRE(files.size() == 2);
  CHECK(files[0].outcome == "rejected");
  CHECK(files[0].reason == "no header");
  CHECK(files[1].id == first);
  CHECK(files[1].name == "odd\xff\nname.csv");
  CHECK(files[1].analyzer == "line1");
  CHECK(files[1].received_at == at(10));
  CHECK(files[1].committed_at == at(20));
  CHECK(files[1].size == static_cast<std::int64_t>(file_of("s1").size));
  CHECK(files[1].accepted == 2);
  CHECK(files[1].repeated == 1);
  CHECK(files[1].rejected == 28);
  REQUIRE(files[1].rejected_rows.size() == 20);
  CHECK(files[1].rejected_rows[0].line == 2);
  CHECK(files[1].rejected_rows[0].column == 3);
  CHECK(files[1].rejected_rows[0].text == std::string("a\0\xff", 3));
  CHECK(reader.files({"done", "", 10, 0}).size() == 1);
  CHECK(reader.files({"repeated", "", 10, 0}).empty());
  CHECK(reader.files({"done", "line1", 10, 0}).size() == 1);
  CHECK(reader.files({"", "line9", 10, 0}).empty());
  CHECK(reader.files({"", "", 1, 0}).at(0).outcome == "rejected");
  CHECK(reader.files({"", "", 10, files[0].id}).at(0).id == first);
}

TEST_CASE("a reader sees no half batch and does not hold up the writer") {
  const ScratchFolder folder;
  Journal journal(folder.path());
  JournalReader reader(folder.path());
  journal.begin(at(0));
  journal.add_message(message("m", "a"));
  CHECK_FALSE(reader.next_message("a").has_value());
  journal.commit();
  CHECK(reader.next_message("a").has_value());
}

TEST_CASE("stored readings come in pages by key, with voided, corrected and censored ones") {
  const ScratchFolder folder;
  Journal journal(folder.path());
  JournalReader reader(folder.path());
  in_batch(journal, 10, [&] {
    const auto file = journal.add_file(file_of("a"));
    journal.add_reading(file, split("S-2", 5, 1));
    JournalReading odd = split("S-1", 7, 0.05);
    odd.censored = -1;
    odd.line = 4;
    odd.by = "J. Miller";
    odd.note = "cup 2";
    odd.clock_ambiguous = true;
    journal.add_reading(file, odd);
    journal.add_reading(file, split("S-1", 3, 2));
    journal.add_void(file, split("S-2", 5, 0));
    journal.add_reading(file, check("S-1", 3, 9));
  });
  in_batch(journal, 20, [&] { journal.add_reading(1, split("S-2", 5, 1.5)); });

  ReadingQuery query{"line1", "protein", StoredKind::split, "", std::nullopt, std::nullopt, 3, std::nullopt};
  const auto first = reader.readings(query);
  REQUIRE(first.size() == 3);
  CHECK(first[0].value == 2);
  CHECK(first[1].censored == -1);
  CHECK(first[1].line == 4);
  CHECK(first[1].by == "J. Miller");
  CHECK(first[1].note == "cup 2");
  CHECK(first[1].clock_ambiguous);
  CHECK(first[2].voided);
  CHECK(first[2].corrected);
  CHECK_FALSE(first[0].corrected);
  CHECK(first[2].received_at == at(10));
  query.after = first.back();
  const auto second = reader.readings(query);
  REQUIRE(second.size() == 1);
  CHECK(second[0].value == 1.5);
  CHECK(second[0].revision == 1);
  CHECK_FALSE(second[0].voided);
  CHECK(second[0].received_at == at(20));

  query.after.reset();
  query.item = "S-1";
  CHECK(reader.readings(query).size() == 2);
  query.from = at(3);
  query.to = at(7);
  CHECK(reader.readings(query).size() == 1);
  // Without a filter the pages of one row each show every reading once.
  ReadingQuery every;
  every.limit = 1;
  std::vector<double> values;
  for (auto page = reader.readings(every); !page.empty(); page = reader.readings(every)) {
    values.push_back(page[0].value);
    every.after = page[0];
  }
  CHECK(values == std::vector{9.0, 2.0, 0.05, 1.0, 1.5});
  query.analyzer = "line9";
  CHECK(reader.readings(query).empty());

  std::vector<double> forward;
  reader.each_split("line1", "protein",
                    [&](std::string_view, Instant, std::int32_t, double value) { forward.push_back(value); });
  CHECK(forward == std::vector{2.0, 1.5});
}

TEST_CASE("the newest configuration is known by its hash") {
  const ScratchFolder folder;
  Journal journal(folder.path());
  CHECK(journal.last_configuration_sha256().empty());
  in_batch(journal, 1, [&] { journal.add_configuration("a", "first", at(1)); });
  in_batch(journal, 2, [&] { journal.add_configuration("b", "second", at(0)); });
  CHECK(journal.last_configuration_sha256() == "second");
}
