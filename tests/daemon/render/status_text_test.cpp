// The status on a terminal: right words, within 80 columns, nothing that controls the terminal.
#include "daemon/render/status_text.hpp"

#include <sstream>

#include <doctest/doctest.h>

#include "core/base/rfc3339.hpp"
#include "core/base/utf8.hpp"

using namespace agreed;

namespace {

const Instant kNow = parse_rfc3339("2026-01-05T12:00:00Z")->at;

const std::string kAgrees =
    R"({"site":"Harrow Mill","service":{"version":"0.1.0","started_at":"2026-01-02T12:00:00.000Z"},
 "at":"2026-01-05T11:59:58.000Z","overall":"ok",
 "intake":{"pending_files":1,"files":{"done":12,"repeated":1,"rejected":2},
  "readings":{"accepted":120,"repeated":3,"rejected":4,"voided":5},"last_commit_at":"2026-01-05T11:35:00.000Z"},
 "analyzers":[{"id":"line1","inbox":{"reachable":true,"reason":null},"last_reading_at":"2026-01-05T11:35:00.000Z",
   "charts":{"stable":2,"unstable":0,"learning":1}},
  {"id":"line2","inbox":{"reachable":true},"last_reading_at":null,"charts":{"stable":0,"unstable":0,"learning":0}}],
 "comparisons":[{"id":"protein","measurand":"protein","x":"line1","y":"line2","verdict":"agreement_shown",
   "verdict_since":"2026-01-03T06:00:00.000Z","verdict_reason":null,"agreement_lost_at":null,"pairs":140,
   "largest_bias":{"level":13.0,"bias":0.02,"allowable":0.2},"alerts":0}],
 "alerts":{"open":0,"acknowledged":0}})";

std::string replaced(std::string text, const std::string& from, const std::string& to) {
  const auto at = text.find(from);
  REQUIRE(at != std::string::npos);
  return text.replace(at, from.size(), to);
}

StatusText show(const std::string& status, const std::string& alerts = "", bool colour = false) {
  return status_text({status, alerts, "http://127.0.0.1:7480"}, kNow, colour);
}

bool holds(const std::string& text, const std::string& part) {
  return text.find(part) != std::string::npos;
}

std::size_t widest(const std::string& text) {
  std::size_t most = 0;
  std::istringstream lines(text);
  for (std::string line; std::getline(lines, line);) {
    std::size_t count = 0;
    for (std::string_view left = line; !left.empty(); ++count) {
      REQUIRE(utf8_length(left) > 0);
      left.remove_prefix(utf8_length(left));
    }
    most = std::max(most, count);
  }
  return most;
}

}  // namespace

TEST_CASE("what agrees, in full") {
  const StatusText shown = show(kAgrees);
  CHECK(shown.everything_agrees);
  CHECK(shown.text == R"(Harrow Mill: everything agrees
http://127.0.0.1:7480, agreed 0.1.0, up 3 days, as of 2026-01-05 11:59 UTC

COMPARISONS
  protein       agreement shown since 2026-01-03 06:00 UTC (140 pairs)
                largest bias, line2 - line1: +0.02 at 13, 10 % of allowable 0.2
ALERTS          0 open and 0 acknowledged
ANALYZERS
  line1         last reading 25 min ago; charts: 2 stable, 1 learning
  line2         no reading yet; no charts
INTAKE          1 file waits; last taken in 25 min ago
  files         12 taken, 1 repeated, 2 rejected
  readings      120 accepted, 3 repeated, 4 rejected, 5 taken back
)");
}

TEST_CASE("what does not agree is said in words, and coloured besides") {
  std::string lost = replaced(kAgrees, R"("ok")", R"("alert")");
  lost = replaced(lost, "agreement_shown", "disagreement_shown");
  lost = replaced(lost, R"("bias":0.02)", R"("bias":-0.31)");
  lost = replaced(lost, R"("agreement_lost_at":null)", R"("agreement_lost_at":"2026-01-05T09:00:00.000Z")");
  lost = replaced(lost, R"("reachable":true})", R"("reachable":false,"reason":"it is not mounted"})");
  lost = replaced(lost, R"("open":0)", R"("open":7)");
  const std::string alerts =
      R"({"alerts":[{"id":"17","severity":"critical","state":"open","title":"agreement of protein is lost",
      "opened_at":"2026-01-05T09:00:00.000Z"},{"id":"16","severity":"warning","state":"acknowledged",
      "title":"wheat-low moved","opened_at":"2026-01-05T08:00:00.000Z"}]})";
  const StatusText shown = show(lost, alerts);
  CHECK_FALSE(shown.everything_agrees);
  for (const char* part :
       {"Harrow Mill: ALERT: agreement is lost", "disagreement shown", "line2 - line1: -0.31 at 13, 155 %",
        "agreement lost at 2026-01-05 09:00", "7 open and 0 acknowledged",
        "  17            critical: agreement of protein is lost, 3 h ago",
        "  16            warning: wheat-low moved, acknowledged, 4 h ago", "and 5 more",
        "inbox not reachable: it is not mounted"}) {
    CAPTURE(shown.text);
    CAPTURE(part);
    CHECK(holds(shown.text, part));
  }
  CHECK_FALSE(holds(shown.text, "\x1b"));

  std::string coloured = show(lost, alerts, true).text;
  CHECK(holds(coloured, "\x1b[1;31mdisagreement shown\x1b[0m"));
  for (const std::string code : {"\x1b[32m", "\x1b[33m", "\x1b[1;31m", "\x1b[0m"})
    for (auto at = coloured.find(code); at != std::string::npos; at = coloured.find(code))
      coloured.erase(at, code.size());
  CHECK(coloured == shown.text);
}

TEST_CASE("attention and starting are no yes") {
  for (const char* overall : {"attention", "starting", "something new"}) {
    CAPTURE(overall);
    CHECK_FALSE(show(replaced(kAgrees, R"("ok")", '"' + std::string(overall) + '"')).everything_agrees);
  }
}

TEST_CASE("long names and many of them stay on the screen, what does not agree among them") {
  std::string many = R"({"site":")" + std::string(200, 'S') + R"(","overall":"attention","comparisons":[)";
  for (int i = 0; i < 20; ++i)
    many += R"({"id":"a-comparison-of-moisture-)" + std::to_string(i) + R"(","x":")" + std::string(90, 'x') +
            R"(","y":"Müllerei ßß","pairs":7,"verdict":")" + (i == 19 ? "inconclusive" : "agreement_shown") +
            "\"},";
  many.back() = ']';
  const StatusText shown = show(many + "}");
  CHECK(widest(shown.text) <= 80);
  CHECK(holds(shown.text, "inconclusive"));
  CHECK(holds(shown.text, "and 12 more"));
}

TEST_CASE("nothing from outside controls the terminal, and gaps are no error") {
  const StatusText evil =
      show(R"({"site":"a\u001b[2Jb\u009bc","overall":"ok","comparisons":[{"id":"\u001b]0;x\u0007"}]})");
  CHECK_FALSE(holds(evil.text, "\x1b"));
  CHECK_FALSE(holds(evil.text, "\x07"));
  CHECK(show(R"({"overall":"ok","analyzers":3,"alerts":[],"intake":"no","comparisons":[7,null]})")
            .everything_agrees);
}

TEST_CASE("what is no status is refused") {
  for (const char* text : {"", "{}", "[]", "<html>", R"({"overall":1})", "{\"overall\":\"\"}"}) {
    CAPTURE(text);
    CHECK_THROWS_AS(show(text), std::invalid_argument);
  }
}
