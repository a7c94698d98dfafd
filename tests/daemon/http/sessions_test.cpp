// Sessions: found by their id until they end, never more than allowed, none like another.
#include "daemon/http/sessions.hpp"

#include <set>
#include <string>
#include <vector>

#include <doctest/doctest.h>

namespace {
using namespace agreed;
using namespace std::chrono_literals;

const Sessions::Time kNow = Sessions::Time{} + 1000h;
}  // namespace

TEST_CASE("a session is found by its id, and by nothing else, until it ends or is closed") {
  Sessions sessions;
  const std::string id = sessions.open(sha256("ooo"), kNow + 12h);
  const auto session = sessions.find(id, kNow);
  REQUIRE(session);
  CHECK(session->token == sha256("ooo"));
  CHECK(session->form_key.size() == 64);
  CHECK(session->form_key != id);
  CHECK_FALSE(sessions.find("", kNow));
  CHECK_FALSE(sessions.find(id.substr(1), kNow));
  CHECK_FALSE(sessions.find(id + "0", kNow));
  CHECK(sessions.find(id, kNow + 12h - 1ns));
  CHECK_FALSE(sessions.find(id, kNow + 12h));
  CHECK_FALSE(sessions.find(id, kNow));  // it was forgotten
  const std::string other = sessions.open(sha256("ooo"), kNow + 12h);
  sessions.close("no such id");
  CHECK(sessions.find(other, kNow));
  sessions.close(other);
  CHECK_FALSE(sessions.find(other, kNow));
}

TEST_CASE("beyond the most there may be, the one opened longest ago has to go") {
  Sessions sessions(3);
  std::vector<std::string> ids;
  for (int i = 0; i < 5; ++i) ids.push_back(sessions.open(sha256("ooo"), kNow + 12h));
  CHECK(std::set<std::string>(ids.begin(), ids.end()).size() == 5);
  for (int i = 0; i < 5; ++i)
    CHECK(sessions.find(ids[static_cast<std::size_t>(i)], kNow).has_value() == (i >= 2));
}
