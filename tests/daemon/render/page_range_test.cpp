// Which part of a history is drawn, and what the links to other parts say.
#include "daemon/render/page_range.hpp"

#include <doctest/doctest.h>

#include "page_markup.hpp"
#include "page_mill.hpp"

namespace {
using namespace agreed;
using namespace std::chrono;

std::vector<Instant> hourly(int count) {
  std::vector<Instant> times;
  for (int i = 0; i < count; ++i) times.push_back(Instant{sys_days{year{2026} / 1 / 5}} + hours(i));
  return times;
}

PageRange asked(const std::map<std::string, std::string>& parameters) {
  return read_range(parameters, "points");
}

bool has(const std::string& text, const std::string& part) {
  return text.find(part) != std::string::npos;
}

}  // namespace

TEST_CASE("without a time the newest are drawn, with one those from then on") {
  const auto times = hourly(100);
  CHECK(cut_of(times, asked({})).count == 100);
  const RangeCut newest = cut_of(times, asked({{"points", "30"}}));
  CHECK(newest.first == 70);
  CHECK(newest.count == 30);
  const RangeCut from = cut_of(times, asked({{"points", "30"}, {"from", "2026-01-05T10:00:00Z"}}));
  CHECK(from.first == 10);
  CHECK(from.count == 30);
  const RangeCut late = cut_of(times, asked({{"from", "2027-01-05T10:00:00Z"}}));
  CHECK(late.first == 100);
  CHECK(late.count == 0);
  CHECK(cut_of({}, asked({{"points", "30"}})).count == 0);
}

TEST_CASE("a wrong parameter is told and cuts nothing") {
  for (const char* count : {"0", "501", "-1", "x", "", "1.5", "30 "}) {
    CAPTURE(count);
    CHECK(has(asked({{"points", count}}).error, "whole number from 1 to 500"));
  }
  for (const char* from : {"yesterday", "2026-01-05", "2026-01-05T10:00:00", ""}) {
    CAPTURE(from);
    CHECK(has(asked({{"from", from}}).error, "from must be a time"));
  }
  CHECK(asked({{"points", "500"}, {"from", "2026-01-05T10:00:00+02:00"}}).error.empty());
}

TEST_CASE("links lead earlier, later, to the newest and to all, and leave out what is not there") {
  const auto times = hourly(100);
  const auto html = [&](const std::map<std::string, std::string>& parameters) {
    const PageRange range = asked(parameters);
    return range_html("/charts/a/b/c", "points", "readings", times, range, cut_of(times, range));
  };
  const std::string middle = html({{"points", "30"}, {"from", "2026-01-06T16:00:00Z"}});
  CHECK(has(middle, "30 of 100 readings"));
  CHECK(has(middle, "points=30&amp;from=2026-01-05T10:00:00.000Z#drawn\">Earlier"));
  CHECK(has(middle, "points=30&amp;from=2026-01-07T22:00:00.000Z#drawn\">Later"));
  CHECK(has(middle, ">All</a>"));
  CHECK_FALSE(has(html({{"points", "30"}}), "Later"));
  CHECK_FALSE(has(html({}), "Earlier"));
  CHECK_FALSE(has(html({}), ">All</a>"));
  CHECK(has(html({}), "Newest 60"));
  CHECK_FALSE(has(html({}), "Newest 120"));
  CHECK(has(html({{"from", "2027-01-05T10:00:00Z"}}),
            "There are no readings from <span class=\"whole\">2027-01-05 10:00 UTC</span> on."));
}

TEST_CASE("a cut page is well formed, draws only its part, and a wrong one answers 400 with all") {
  const mill::Story story = mill::drifting();
  const std::string chart = "/charts/line2/wheat-high/protein";
  const auto page = mill::ask(story, chart, {{"points", "20"}});
  REQUIRE(page);
  CHECK(page->status == 200);
  CHECK(read_markup(page->body).faults.empty());
  CHECK(has(page->body, "Drawn are 20 of 102 readings"));
  CHECK(page->body.size() < mill::ask(story, chart)->body.size());
  const auto wrong = mill::ask(story, chart, {{"points", "many"}});
  CHECK(wrong->status == 400);
  CHECK(has(wrong->body, "points must be a whole number from 1 to 500"));
  for (const auto& parameters :
       std::vector<std::map<std::string, std::string>>{{{"pairs", "1"}},
                                                       {{"pairs", "40"}, {"from", "2026-01-02T00:00:00Z"}},
                                                       {{"from", "2030-01-02T00:00:00Z"}}})
    CHECK(read_markup(mill::ask(story, "/comparisons/protein", parameters)->body).faults.empty());
}
