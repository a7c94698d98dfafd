// What every path answers, to whom, and what it answers when asked wrongly.
#include "daemon/http/router.hpp"

#include <algorithm>
#include <chrono>
#include <filesystem>

#include <doctest/doctest.h>
#include <nlohmann/json.hpp>
#include <unistd.h>

#include "daemon/http/access.hpp"
#include "daemon/http/etag.hpp"
#include "daemon/sha256.hpp"
#include "tests/daemon/http/mill_snapshot.hpp"
#include "tests/support/as_nobody.hpp"
#include "tests/support/temp_folder.hpp"

using namespace agreed;
using namespace agreed::test;
using nlohmann::json;

namespace {

/// Tokens of "rrr" (reader) and "ooo" (operator), in a folder of its own.
struct TokensFile {
  TokensFile() {
    write("# who may ask\nreader wall " + sha256_hex("rrr") + "\n\noperator shift " + sha256_hex("ooo") +
          "\n");
  }
  void write(const std::string& text) const { testing::write_file(path, text); }
  testing::TempFolder folder;
  std::filesystem::path path = folder.path() / "tokens";
};

AlertRecord record(int id) {
  const std::string body = R"({"id":")" + std::to_string(id) +
                           R"(","kind":"check_standard_unstable","severity":"warning","state":"open",)" +
                           R"("title":"wheat-low moved","details":{}})";
  AlertRecord made{body, {{id, at_hour(8), "opened", body}}, {}};
  DeliveryRow delivery;
  delivery.message = "m-1";
  delivery.route = "shift-leader";
  delivery.type = "agreed.alert.opened";
  delivery.state = "waiting";
  delivery.created_at = at_hour(8);
  delivery.next_try_at = at_hour(9);
  delivery.tries = 2;
  delivery.last_status = 500;
  delivery.last_error = "answered 500";
  made.deliveries = {delivery};
  return made;
}

struct House {
  explicit House(bool reads_need_token = false)
      : router({service,
                tokens,
                {[this](const AlertQuery& query) {
                   asked = query;
                   std::vector<AlertRecord> found;
                   for (int id = 20; id > 10 && static_cast<int>(found.size()) < query.limit; --id)
                     if (query.before_id == 0 || id < query.before_id) found.push_back(record(id));
                   return found;
                 },
                 [](std::int64_t id) { return id == 17 ? std::optional(record(17)) : std::nullopt; },
                 [this]() -> std::vector<MessageCount> {
                   if (journal_gone) throw JournalError("The journal is not there.", true);
                   return {{"engineer", "waiting", 2}};
                 }},
                {[](const FileQuery&) { return std::vector<FileRow>(1); },
                 [](const ReadingQuery&) { return std::vector<ReadingRow>(1); }},
                [](const PageAsk& ask) -> std::optional<Page> {
                  if (ask.path == "/")
                    return Page{200, "text/html; charset=utf-8", "<title>Harrow Mill</title>"};
                  if (ask.path == "/charts/line1/wheat-low/protein")
                    return Page{200, "text/html", "chart " + ask.query};
                  return std::nullopt;
                },
                reads_need_token,
                [this] { return stopping; }}) {}

  HttpAnswer ask(const std::string& target, const std::string& method = "GET", const std::string& token = "",
                 const std::string& body = "", const std::string& if_none_match = "") {
    HttpRequest request;
    request.method = method;
    request.target = target;
    if (!token.empty()) request.authorization = "Bearer " + token;
    request.if_none_match = if_none_match;
    request.body = body;
    return router.answer(request);
  }
  HttpAnswer acknowledge(const std::string& id, const std::string& body, const std::string& token = "ooo") {
    return ask("/api/alerts/" + id + "/acknowledge", "POST", token, body);
  }

  bool stopping = false, journal_gone = false;
  AlertQuery asked;
  TokensFile file;
  std::string told, told_over;
  Tokens tokens{file.path, [this](const std::string& words) { told += words + "\n"; },
                [this](const std::string& words) { told_over += words + "\n"; }};
  FakeService service{full_snapshot()};
  Router router;
};

std::string header(const HttpAnswer& answer, const std::string& name) {
  for (const auto& [key, value] : answer.headers)
    if (key == name) return value;
  return {};
}

void check_problem(const HttpAnswer& answer, int status) {
  CHECK(answer.status == status);
  REQUIRE(answer.content_type == "application/problem+json");
  const json document = json::parse(answer.body);
  CHECK(document.at("type") == "about:blank");
  CHECK(document.at("status") == status);
  CHECK(document.at("title").get<std::string>().size() > 3);
  CHECK(document.at("detail").get<std::string>().size() > 3);
  CHECK(document.at("instance").get<std::string>().front() == '/');
}

}  // namespace

TEST_CASE("every path of the table answers") {
  House house;
  for (const char* path : {"/api/status", "/api/charts", "/api/charts/line1/wheat-low/protein",
                           "/api/charts/line1/wheat%2Dlow/protein?points=3", "/api/comparisons",
                           "/api/comparisons/protein?pairs=2", "/api/alerts", "/api/alerts/17", "/api/files",
                           "/api/readings", "/api/openapi.json", "/health/live", "/health/ready"}) {
    CAPTURE(path);
    const HttpAnswer answer = house.ask(path);
    CHECK(answer.status == 200);
    CHECK(answer.content_type == "application/json");
    CHECK(json::accept(answer.body));
    CHECK(answer.etag == etag_of(answer.body));
  }
}

TEST_CASE("the metrics are OpenMetrics text, asked for like the API and not like a page") {
  House house;
  const HttpAnswer answer = house.ask("/metrics");
  CHECK(answer.status == 200);
  CHECK(answer.content_type == "application/openmetrics-text; version=1.0.0; charset=utf-8");
  CHECK(answer.body.find("\nagreed_messages{route=\"engineer\",state=\"waiting\"} 2\n") != std::string::npos);
  CHECK(house.ask("/metrics", "GET", "", "", answer.etag).status == 304);
  check_problem(house.ask("/metrics", "POST", "ooo"), 405);
  check_problem(house.ask("/metrics/more"), 404);
  House closed(true);
  check_problem(closed.ask("/metrics"), 401);
  CHECK(closed.ask("/metrics", "GET", "rrr").status == 200);
  House dark;
  dark.journal_gone = true;
  CHECK(dark.ask("/metrics").status == 200);
  CHECK(dark.ask("/metrics").body.find("agreed_messages") == std::string::npos);
}

TEST_CASE("an ETag sent back gives 304 without a body, in a list, weak, or as *") {
  House house;
  const HttpAnswer first = house.ask("/api/status");
  REQUIRE(first.etag.size() == 34);
  for (const std::string& sent : {first.etag, "\"other\", W/" + first.etag, std::string("*")}) {
    CAPTURE(sent);
    const HttpAnswer again = house.ask("/api/status", "GET", "", "", sent);
    CHECK(again.status == 304);
    CHECK(again.body.empty());
    CHECK(again.etag == first.etag);
    CHECK(header(again, "Content-Length") == std::to_string(first.body.size()));
  }
  CHECK(house.ask("/api/status", "HEAD", "", "", first.etag).status == 304);
  for (const std::string& sent : {std::string("\"other\""), first.etag.substr(1, 32), std::string("\"")})
    CHECK(house.ask("/api/status", "GET", "", "", sent).status == 200);
  CHECK(house.ask("/api/nothing", "GET", "", "", "*").status == 404);
}

TEST_CASE("an answer is kept for its snapshot and made anew for the next") {
  House house;
  const HttpAnswer first = house.ask("/api/status");
  CHECK(house.ask("/api/status").body == first.body);
  Snapshot next = full_snapshot();
  next.at += std::chrono::seconds(1);
  house.service.show(next);
  const HttpAnswer second = house.ask("/api/status");
  CHECK(second.etag != first.etag);
  CHECK(json::parse(second.body).at("service").at("uptime_s") == 3601);
}

TEST_CASE("points, pairs and limit are whole numbers from 1 to 500, and are looked at before existence") {
  House house;
  for (const char* bad : {"0", "501", "-1", "+5", "1.5", "", "ten", "1e2", "0x10", " 5", "5%20", "%zz",
                          "99999999999999999999"}) {
    CAPTURE(bad);
    check_problem(house.ask(std::string("/api/charts?points=") + bad), 400);
    check_problem(house.ask(std::string("/api/charts/no/such/chart?points=") + bad), 400);
    check_problem(house.ask(std::string("/api/comparisons/nothing?pairs=") + bad), 400);
    check_problem(house.ask(std::string("/api/comparisons?pairs=") + bad), 400);
    check_problem(house.ask(std::string("/api/alerts?limit=") + bad), 400);
  }
  const auto points_of = [&](const std::string& query) {
    return json::parse(house.ask("/api/charts/line1/wheat-low/protein" + query).body).at("points");
  };
  CHECK(points_of("").size() == 7);
  CHECK(points_of("?points=500").size() == 7);
  REQUIRE(points_of("?points=2").size() == 2);
  CHECK(points_of("?points=2")[0].at("measured_at") == "2026-01-05T05:00:00.000Z");
  CHECK(points_of("?points=2")[1].at("measured_at") == "2026-01-05T06:00:00.000Z");
  const json pairs = json::parse(house.ask("/api/comparisons/protein?pairs=1").body).at("pairs");
  REQUIRE(pairs.size() == 1);
  CHECK(pairs[0].at("sample") == "S-104");
}

TEST_CASE("what is not there is 404, also for paths that try to leave") {
  House house;
  for (const char* path :
       {"/api",
        "/api/",
        "/api/nothing",
        "/api/status/",
        "/api/charts/line1",
        "/api/charts/line3/wheat-low/protein",
        "/api/charts/line2/wheat-high/protein",
        "/api/comparisons/moisture",
        "/api/alerts/99",
        "/api/alerts/x",
        "/api/alerts/-17",
        "/api/alerts/99999999999999999999",
        "/health",
        "/nothing",
        "//api/status",
        "/./api/status",
        "/api/../etc/passwd",
        "/api/%2e%2e/%2e%2e/etc/passwd",
        "/api/..%2f..%2fetc%2fpasswd",
        "/..%5c..%5cboot.ini",
        "/api/status%00",
        "/api/%0a",
        "/api/%",
        "/api/%g0",
        "/api/alerts/17/acknowledged",
        "/api/comparisons/aaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaa"}) {
    CAPTURE(path);
    check_problem(house.ask(path), 404);
  }
}

TEST_CASE("other methods are 405 and name the right one") {
  House house;
  for (const char* method : {"PUT", "DELETE", "PATCH", "OPTIONS", "TRACE", "POST"}) {
    CAPTURE(method);
    const HttpAnswer answer = house.ask("/api/status", method, "ooo");
    check_problem(answer, 405);
    CHECK(header(answer, "Allow") == "GET, HEAD");
    CHECK(house.ask("/", method, "ooo").status == 405);
  }
  for (const char* method : {"GET", "HEAD", "DELETE"}) {
    const HttpAnswer answer = house.ask("/api/alerts/17/acknowledge", method);
    check_problem(answer, 405);
    CHECK(header(answer, "Allow") == "POST");
  }
}

TEST_CASE("alerts: state, since, limit and cursor reach the journal; bad ones are 400") {
  House house;
  const HttpAnswer answer =
      house.ask("/api/alerts?state=open,resolved&since=2026-01-05T07:00:00%2B01:00&limit=3");
  REQUIRE(answer.status == 200);
  CHECK(house.asked.states == std::vector<std::string>{"open", "resolved"});
  CHECK(house.asked.since == at_hour(6));
  const json list = json::parse(answer.body);
  REQUIRE(list.at("alerts").size() == 3);
  CHECK(list.at("alerts")[0].at("id") == "20");
  CHECK(list.at("next") == "18");
  const json second = json::parse(house.ask("/api/alerts?limit=500&cursor=18").body);
  CHECK(json::parse(house.ask("/api/alerts?limit=500&after=18").body) == second);
  CHECK(second.at("alerts").size() == 7);
  CHECK(second.at("alerts")[0].at("id") == "17");
  CHECK(second.at("next").is_null());
  for (const char* query :
       {"state=opened", "state=", "state=open,", "since=yesterday", "since=2026-01-05T06:00:00",
        "since=2026-01-05T06:00:00+01:00", "cursor=0", "cursor=x", "after=0", "limit=0"}) {
    CAPTURE(query);
    check_problem(house.ask(std::string("/api/alerts?") + query), 400);
  }
}

TEST_CASE("an alert comes with its history and deliveries") {
  House house;
  const json alert = json::parse(house.ask("/api/alerts/17").body);
  CHECK(alert.at("id") == "17");
  CHECK(alert.at("title") == "wheat-low moved");
  REQUIRE(alert.at("history").size() == 1);
  CHECK(alert.at("history")[0].at("change") == "opened");
  CHECK(alert.at("history")[0].at("at") == "2026-01-05T08:00:00.000Z");
  REQUIRE(alert.at("deliveries").size() == 1);
  CHECK(alert.at("deliveries")[0].at("delivered_at").is_null());
  CHECK(alert.at("deliveries")[0].at("last_status") == 500);
}

TEST_CASE("acknowledging needs an operator's token: token first, then body, then existence") {
  House house;
  const std::string body = R"({"by":"A. Miller","note":"lamp changed"})";
  const HttpAnswer none = house.acknowledge("17", body, "");
  check_problem(none, 401);
  CHECK(header(none, "WWW-Authenticate").find("Bearer") == 0);
  check_problem(house.acknowledge("17", body, "wrong"), 401);
  check_problem(house.acknowledge("99", "nonsense", "wrong"), 401);
  check_problem(house.acknowledge("17", body, "rrr"), 403);
  check_problem(house.ask("/api/interventions", "POST", "", "{}"), 401);
  CHECK(house.service.acknowledged_by.empty());
  check_problem(house.acknowledge("99", "nonsense"), 400);
  check_problem(house.acknowledge("99", body), 404);
  check_problem(house.acknowledge("x", body), 404);
  check_problem(house.acknowledge("18", body), 409);
  const HttpAnswer done = house.acknowledge("17", body);
  CHECK(done.status == 200);
  CHECK(json::parse(done.body).at("id") == "17");
  CHECK(house.service.acknowledged_by == "A. Miller");
  CHECK(house.service.acknowledged_note == "lamp changed");
  CHECK(house.acknowledge("17", R"({"by":"A. Miller"})").status == 200);
}

TEST_CASE("bad bodies of an acknowledgement are 400 and say what is expected") {
  House house;
  for (const std::string& body :
       {std::string(), std::string("{}"), std::string("[]"), std::string("17"), std::string(R"({"by":""})"),
        std::string(R"({"by":" "})"), std::string(R"({"by":17})"), std::string(R"({"by":"a","note":null})"),
        std::string(R"({"by":"a","notes":"b"})"), std::string(R"({"by":"a")"),
        std::string("{\"by\":\"\xff\"}"), std::string(R"({"by":{"a":{"b":{"c":1}}}})"),
        std::string(16000, '['), R"({"by":")" + std::string(101, 'a') + "\"}",
        R"({"by":"a","note":")" + std::string(1001, 'a') + "\"}"}) {
    CAPTURE(body);
    const HttpAnswer answer = house.acknowledge("17", body);
    check_problem(answer, 400);
    CHECK(answer.body.find("Expected") != std::string::npos);
  }
  CHECK(house.service.acknowledged_by.empty());
}

TEST_CASE("an intervention told by an operator is stored, or its field at fault is named") {
  House house;
  const auto tell = [&](const std::string& body, const std::string& token = "ooo") {
    return house.ask("/api/interventions", "POST", token, body);
  };
  const std::string body = R"({"analyzer":"line1","measurand":"protein","standard":null,"kind":"repaired",)"
                           R"("by":"A. Miller","note":"lamp"})";
  check_problem(tell(body, "rrr"), 403);
  check_problem(tell("nonsense", "wrong"), 401);
  check_problem(house.ask("/api/interventions", "GET", "ooo"), 405);
  CHECK(house.service.told_interventions.empty());
  const HttpAnswer done = tell(body);
  CHECK(done.status == 201);
  CHECK(json::parse(done.body) ==
        json::parse(R"({"id":"5","analyzer":"line1","standard":null,)"
                    R"("measurand":"protein","kind":"repaired",)"
                    R"("at":"2026-01-05T06:00:00.000Z","by":"A. Miller","note":"lamp"})"));
  const std::string begin = R"({"analyzer":"line1","kind":"noted","by":"a",)";
  CHECK(tell(begin + R"("at":"2026-01-05T06:00:00Z"})").status == 200);
  check_problem(tell(begin + R"("at":"2026-01-05T07:00:00Z"})"), 409);
  const HttpAnswer unknown = tell(R"({"analyzer":"line3","kind":"noted","by":"a"})");
  check_problem(unknown, 422);
  CHECK(json::parse(unknown.body).at("field") == "analyzer");
  CHECK(json::parse(unknown.body).at("detail") == "analyzer: is not known");
  const std::size_t asked = house.service.told_interventions.size();
  for (const auto& [wrong, field] : std::vector<std::pair<std::string, std::string>>{
           {"", ""},
           {"[]", ""},
           {"{}", "analyzer"},
           {R"({"analyzer":"line1"})", "kind"},
           {R"({"analyzer":"line1","kind":"noted"})", "by"},
           {begin + R"("by":"b"})", "by"},
           {begin + R"("notes":"b"})", "notes"},
           {begin + R"("note":1})", "note"},
           {begin + R"("at":17})", "at"},
           {R"({"analyzer":"line1","kind":"noted","by":null})", "by"},
           {begin + R"("note":{"a":{"b":[]}}})", ""},
           {begin + "\"note\":\"\xff\"}", ""}}) {
    const std::string& told = wrong;
    CAPTURE(told);
    const HttpAnswer answer = tell(told);
    check_problem(answer, 400);
    CHECK(answer.body.find("Expected") != std::string::npos);
    CHECK(json::parse(answer.body).value("field", "") == field);
  }
  CHECK(house.service.told_interventions.size() == asked);
  house.service.down = true;
  check_problem(tell(body), 503);
}

TEST_CASE("a service that cannot store makes 503, also when it does not answer and we stop") {
  House house;
  house.service.down = true;
  const HttpAnswer down = house.acknowledge("17", R"({"by":"a"})");
  check_problem(down, 503);
  CHECK(down.body.find("disk is full") != std::string::npos);
  CHECK(header(down, "Retry-After") == "5");
  house.service.hangs = house.stopping = true;
  const auto begin = std::chrono::steady_clock::now();
  check_problem(house.acknowledge("17", R"({"by":"a"})"), 503);
  CHECK(std::chrono::steady_clock::now() - begin < std::chrono::milliseconds(400));
}

TEST_CASE("where reading needs a token, only health is open") {
  House house(true);
  CHECK(house.ask("/health/live").status == 200);
  CHECK(house.ask("/health/ready").status == 200);
  for (const char* path :
       {"/api/status", "/api/charts?points=0", "/api/nothing", "/", "/nothing", "/api/alerts/17"}) {
    CAPTURE(path);
    check_problem(house.ask(path), 401);
    check_problem(house.ask(path, "HEAD"), 401);
    check_problem(house.ask(path, "GET", "wrong"), 401);
    CHECK(house.ask(path, "GET", "rrr").status != 401);
    CHECK(house.ask(path, "GET", "ooo").status != 401);
  }
  CHECK(house.ask("/api/status", "GET", "rrr").status == 200);
}

TEST_CASE("ready tells its reasons, ready or not") {
  House house;
  CHECK(json::parse(house.ask("/health/ready").body).at("reasons").empty());
  house.service.show(empty_snapshot());
  const HttpAnswer answer = house.ask("/health/ready");
  check_problem(answer, 503);
  CHECK(json::parse(answer.body).at("reasons").size() == 1);
  CHECK(house.ask("/health/live").status == 200);
  CHECK(house.ask("/api/status").status == 200);
}

TEST_CASE("pages come from their renderer, with an ETag") {
  House house;
  const HttpAnswer page = house.ask("/");
  CHECK(page.status == 200);
  CHECK(page.content_type == "text/html; charset=utf-8");
  CHECK(house.ask("/", "GET", "", "", page.etag).status == 304);
  CHECK(house.ask("/charts/line1/wheat%2dlow/protein?points=5").body == "chart points=5");
  check_problem(house.ask("/charts/line1/../wheat-low/protein"), 404);
}

TEST_CASE("the tokens file is read again when it changes; bad lines are told without their words") {
  House house;
  CHECK(house.tokens.role_of("rrr") == Role::reader);
  CHECK(house.tokens.role_of("ooo") == Role::operator_);
  CHECK_FALSE(house.tokens.role_of(""));
  CHECK_FALSE(house.tokens.role_of(sha256_hex("ooo")));
  CHECK(house.told.empty());
  house.file.write("operator new " + sha256_hex("nnn") + "\nreader secret-in-the-wrong-place\nboss x " +
                   sha256_hex("b") + "\n");
  CHECK_FALSE(house.tokens.role_of("ooo"));
  CHECK(house.tokens.role_of("nnn") == Role::operator_);
  CHECK_FALSE(house.tokens.role_of("b"));
  CHECK(house.told.find(":2: expected") != std::string::npos);
  CHECK(house.told.find(":3: expected") != std::string::npos);
  CHECK(house.told.find("secret") == std::string::npos);
  std::filesystem::remove(house.file.path);
  CHECK_FALSE(house.tokens.role_of("nnn"));
  CHECK_FALSE(house.tokens.any());
  CHECK(house.told.find("cannot be used: there is no file") != std::string::npos);
}

TEST_CASE(
    "a tokens file that cannot be used is told once, to the log and by readiness, and when that is over") {
  House house;
  const auto remarks = [&] { return json::parse(house.ask("/health/ready").body).at("remarks"); };
  const auto last_remark = [&] { return remarks().back().get<std::string>(); };
  const auto forget = [&] {
    house.told.clear();
    house.told_over.clear();
  };
  const json before = remarks();
  CHECK(house.told.empty());
  const std::filesystem::path folder = house.file.folder.path();
  std::filesystem::permissions(folder, std::filesystem::perms::none);
  {
    const testing::AsNobody nobody;
    REQUIRE(remarks().size() == before.size() + 1);
    const std::string remark = last_remark();
    CHECK(remark.find("permission denied: user ") != std::string::npos);
    CHECK(remark.find(" may not search the folder " + folder.string()) != std::string::npos);
    CHECK(house.told == remark + "\n");
    CHECK(house.ask("/health/ready").status == 200);  // measuring goes on
    CHECK_FALSE(house.tokens.any());
    CHECK(house.told_over.empty());
  }
  std::filesystem::permissions(folder, std::filesystem::perms::owner_all);
  forget();
  CHECK(remarks() == before);
  CHECK(house.tokens.any());
  CHECK(house.told.empty());
  CHECK(house.told_over.find("can be read again") != std::string::npos);

  forget();
  house.file.write("boss x " + sha256_hex("b") + "\nnobody\n");
  CHECK(last_remark().find(":1: expected") != std::string::npos);
  CHECK(last_remark().find("(and 1 more") != std::string::npos);
  forget();
  house.tokens.use(house.file.path);  // a reload tells it again
  CHECK(house.told.find(":2: expected") != std::string::npos);
  forget();
  std::string of_another_kind;
  for (int i = 0; i < 1000; ++i) of_another_kind += "results, and no tokens\n";
  house.file.write(of_another_kind);
  CHECK(last_remark().find("(and 20 more") != std::string::npos);
  CHECK(std::count(house.told.begin(), house.told.end(), '\n') < 25);
  CHECK(house.told.find("980 further lines") != std::string::npos);
  house.file.write("reader x " + sha256_hex("b") + "\n");
  CHECK(remarks() == before);
  CHECK(house.told_over.find("every line") != std::string::npos);
}

TEST_CASE("what hindered the reading of the tokens file need not change the file to be over") {
  if (::getuid() != 0) {
    MESSAGE("skipped: only root can become somebody else, and a change of permissions changes the file");
    return;
  }
  House house;
  std::filesystem::permissions(house.file.folder.path(), std::filesystem::perms(0755));
  std::filesystem::permissions(house.file.path, std::filesystem::perms(0600));
  {
    const testing::AsNobody nobody;
    CHECK_FALSE(house.tokens.any());
  }
  CHECK(house.tokens.any());
}

TEST_CASE("no tokens file: every POST is 401") {
  Tokens none(std::nullopt, [](const std::string&) {});
  CHECK_FALSE(none.any());
  CHECK_FALSE(none.role_of("ooo"));
}

TEST_CASE("who is refused an open address hears what is wrong with the tokens file") {
  Tokens gone("/nowhere/tokens", [](const std::string&) {});
  std::string refusal;
  try {
    require_reader_token({"0.0.0.0", 7480, false}, gone);
  } catch (const std::runtime_error& error) {
    refusal = error.what();
  }
  CHECK(refusal.find("there is no file /nowhere/tokens") != std::string::npos);
  CHECK(refusal.find("open_to_network") != std::string::npos);
}

TEST_CASE("an address others can reach needs a reader's token, or to be opened on purpose") {
  House house;
  Tokens none(std::nullopt, [](const std::string&) {});
  CHECK_NOTHROW(require_reader_token({"127.0.0.1", 7480, false}, none));
  CHECK_NOTHROW(require_reader_token({"::1", 7480, false}, none));
  CHECK_THROWS_AS(require_reader_token({"0.0.0.0", 7480, false}, none), std::runtime_error);
  CHECK_NOTHROW(require_reader_token({"0.0.0.0", 7480, true}, none));
  CHECK_NOTHROW(require_reader_token({"0.0.0.0", 7480, false}, house.tokens));
  CHECK(reads_need_token({"192.0.2.7", 7480, false}));
  CHECK_FALSE(reads_need_token({"192.0.2.7", 7480, true}));
  CHECK_FALSE(reads_need_token({"127.0.0.1", 7480, false}));
  CHECK(reads_need_token({"127.0.0.1", 7480, false, true}));
  CHECK_FALSE(reads_need_token({"127.0.0.1", 7480, true, true}));
  CHECK_THROWS_WITH_AS(require_reader_token({"127.0.0.1", 7480, false, true}, none),
                       doctest::Contains("behind_proxy"), std::runtime_error);
}

TEST_CASE("a message is sent again for an operator, once it is known and does not wait") {
  House house;
  const auto ask = [&](const std::string& id, const std::string& token = "ooo") {
    return house.ask("/api/messages/" + id + "/resend", "POST", token);
  };
  const HttpAnswer done = ask("msg_1");
  CHECK(done.status == 202);
  CHECK(json::parse(done.body) == json{{"message", "msg_1"}, {"route", "engineer"}, {"state", "waiting"}});
  check_problem(ask("msg_1", ""), 401);
  check_problem(ask("msg_1", "rrr"), 403);
  check_problem(ask("msg_2"), 409);
  check_problem(ask("msg_9"), 404);
  check_problem(house.ask("/api/messages/msg_1/resend"), 405);
  house.service.down = true;
  check_problem(ask("msg_1"), 503);
}
