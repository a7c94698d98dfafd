// The page as a whole: well formed, harmless under its content policy, whatever texts others wrote.
#include "daemon/render/page.hpp"

#include <set>

#include <doctest/doctest.h>

#include "page_markup.hpp"
#include "page_mill.hpp"

namespace {
using namespace agreed;

std::string body_of(const mill::Story& story, const std::string& path, Duration late = {}) {
  const auto answer = mill::ask(story, path, {}, late);
  REQUIRE(answer);
  CHECK(answer->status == 200);
  return answer->body;
}

std::vector<std::string> paths_of(const mill::Story& story) {
  std::vector<std::string> paths = {"/", "/alerts", "/files", "/sign-in"};
  for (const Alert& alert : story.current) paths.push_back("/alerts/" + std::to_string(alert.id));
  const Settings& settings = *story.snapshot.settings;
  for (const auto& comparison : settings.comparisons) paths.push_back("/comparisons/" + comparison.id);
  for (const auto& chart : settings.charts)
    paths.push_back("/charts/" + settings.of(chart.analyzer).id + "/" + settings.of(chart.standard).id + "/" +
                    settings.of(chart.measurand).id);
  return paths;
}

std::vector<std::pair<std::string, mill::Story>> all_stories() {
  return {{"agreeing", mill::agreeing()},
          {"drifting", mill::drifting()},
          {"empty", mill::empty()},
          {"gathering", mill::gathering()},
          {"starting", mill::starting()},
          {"many", mill::many(40)},
          {"hostile", mill::hostile("<script>alert('&\"x\")</script>")}};
}

void check_policy(const Markup& page) {
  std::set<std::string> ids;
  for (const Element& element : page.elements) {
    for (const auto& [key, value] : element.attributes) {
      CHECK_MESSAGE(!key.starts_with("on"), key);
      CHECK_MESSAGE(key != "style", value);
      if (key == "href" || key == "src") CHECK_MESSAGE((value[0] == '/' || value[0] == '#'), value);
      if (key == "href" || key == "src") CHECK_MESSAGE(!value.starts_with("//"), value);
      if (key == "id") CHECK_MESSAGE(ids.insert(value).second, "id twice: ", value);
    }
    CHECK(element.name != "style");
    if (element.name == "script") CHECK(element.attributes.at("src") == "/page.js");
  }
  CHECK(page.count("script") == 1);
}

void check_access(const Markup& page) {
  std::set<std::string> ids;
  for (const Element& element : page.elements)
    if (element.attributes.count("id")) ids.insert(element.attributes.at("id"));
  CHECK(page.count("h1") == 1);
  CHECK(page.count("main") == 1);
  CHECK(page.count("title") >= 1);
  for (const Element& element : page.elements) {
    if (element.name == "html") CHECK(element.attributes.at("lang") == "en");
    if (element.name == "th") CHECK(element.attributes.count("scope") == 1);
    if (element.name != "svg") continue;
    if (element.attributes.count("aria-hidden")) continue;
    CHECK(element.attributes.at("role") == "img");
    const std::string by = element.attributes.at("aria-labelledby");
    const auto space = by.find(' ');
    CHECK_MESSAGE(ids.count(by.substr(0, space)) == 1, by);
    CHECK_MESSAGE(ids.count(by.substr(space + 1)) == 1, by);
  }
}

}  // namespace

TEST_CASE("every page of every state is well formed, keeps to the content policy and can be read aloud") {
  for (const auto& [name, story] : all_stories())
    for (const std::string& path : paths_of(story)) {
      CAPTURE(name);
      CAPTURE(path);
      const std::string body = body_of(story, path);
      const Markup page = read_markup(body);
      for (const std::string& fault : page.faults) FAIL_CHECK(fault);
      check_policy(page);
      check_access(page);
      CHECK(body.find("nan") == std::string::npos);
      CHECK(body.find("://") == std::string::npos);
    }
}

TEST_CASE("the reader of the tests sees what is not well formed") {
  const auto faults = [](const std::string& inside) {
    return read_markup("<!DOCTYPE html>\n<p>" + inside + "</p>").faults.size();
  };
  CHECK(faults("fine &amp; well <b class=\"x\">bold</b>") == 0);
  CHECK(faults("<b>crossed</p></b>") > 0);
  CHECK(faults("bare & ampersand") > 0);
  CHECK(faults("<b class=x>unquoted</b>") > 0);
  CHECK(faults("<b>") > 0);
}

TEST_CASE("texts that others wrote stay texts") {
  const std::string evil = "<img src=x onerror=\"go()\"><script>'&";
  const mill::Story story = mill::hostile(evil);
  for (const std::string& path : paths_of(story)) {
    const std::string body = body_of(story, path);
    const Markup page = read_markup(body);
    CHECK(page.count("img") == 0);
    CHECK(page.count("script") == 1);
    CHECK(page.text.find("<script>") != std::string::npos);
    CHECK(body.find("onerror=\"") == std::string::npos);
  }
}

TEST_CASE("the ids of hostile names never leave their attribute and links are percent-encoded") {
  const std::string body = body_of(mill::hostile("a/\"b c"), "/");
  CHECK(body.find("/comparisons/a%2F%22b%20cprotein") != std::string::npos);
}

TEST_CASE("paths that are not pages get no answer") {
  const mill::Story story = mill::agreeing();
  for (const char* path :
       {"", "/x", "/comparisons", "/comparisons/", "/comparisons/none", "/comparisons/protein/",
        "/charts/line1/wheat-low", "/charts/line1/wheat-low/none", "/page.css/", "/../page.css"})
    CHECK_FALSE(mill::ask(story, path));
}

TEST_CASE("the assets are there, with their types") {
  const mill::Story story = mill::starting();
  const auto css = mill::ask(story, "/page.css");
  const auto js = mill::ask(story, "/page.js");
  REQUIRE(css);
  REQUIRE(js);
  CHECK(css->content_type.starts_with("text/css"));
  CHECK(js->content_type.starts_with("text/javascript"));
  CHECK(css->body.find("prefers-color-scheme: dark") != std::string::npos);
  CHECK(css->body.find("@media print") != std::string::npos);
  CHECK(css->body.find("://") == std::string::npos);
  CHECK(css->body.find("@import") == std::string::npos);
  CHECK(js->body.find("If-None-Match") != std::string::npos);
  CHECK(js->body.find("innerHTML") == std::string::npos);
  CHECK(js->body.ends_with("})();\n"));
}

TEST_CASE("every class that a drawing uses has its look in the style sheet") {
  const mill::Story story = mill::drifting();
  const std::string css = mill::ask(story, "/page.css")->body;
  for (const std::string& path : paths_of(story))
    for (const Element& element : read_markup(body_of(story, path)).elements) {
      const bool drawn = element.name == "path" || element.name == "line" || element.name == "rect";
      const auto found = element.attributes.find("class");
      if (!drawn || found == element.attributes.end()) continue;
      const std::string first = found->second.substr(0, found->second.find(' '));
      CHECK_MESSAGE(css.find("." + first) != std::string::npos, first);
    }
}

TEST_CASE("before the first fold every page says that the service is starting, and why") {
  const mill::Story story = mill::starting();
  for (const std::string& path : paths_of(story)) {
    if (path == "/sign-in") continue;
    const Markup page = read_markup(body_of(story, path));
    CHECK(page.text.find("Starting") != std::string::npos);
    CHECK(page.text.find("64,000 of 100,000 journalled readings folded") != std::string::npos);
  }
  const mill::Story nothing;
  CHECK(mill::ask(nothing, "/")->body.find("Starting") != std::string::npos);
  CHECK_FALSE(mill::ask(nothing, "/comparisons/protein"));
}

TEST_CASE("a ready service whose views are not there yet shows empty ones") {
  mill::Story story = mill::empty();
  story.snapshot.charts.clear();
  story.snapshot.comparisons.clear();
  story.snapshot.analyzers.clear();
  for (const std::string& path : paths_of(story)) CHECK(read_markup(body_of(story, path)).faults.empty());
}

TEST_CASE("figures that the service no longer renews are called not current, in words") {
  const mill::Story story = mill::agreeing();
  const std::string fresh = body_of(story, "/", std::chrono::seconds(100));
  CHECK(fresh.find("Not current") == std::string::npos);
  CHECK(fresh == body_of(story, "/"));
  const std::string late = body_of(story, "/", std::chrono::minutes(7));
  CHECK(late.find("Not current: the service has not renewed these figures for 7 min") != std::string::npos);
}

TEST_CASE("the foot shows the cautions, the version and the time of the figures") {
  for (const auto& [name, story] : all_stories()) {
    const std::string body = body_of(story, "/");
    CHECK(body.find("statistical evidence and not a release decision") != std::string::npos);
    CHECK(body.find("not a medical device and no safety interlock") != std::string::npos);
    CHECK(body.find("agreed 9.8.7") != std::string::npos);
  }
  CHECK(body_of(mill::agreeing(), "/").find("2026-01-31 02:03 UTC") != std::string::npos);
}

TEST_CASE("alerts are shown worst first, with what they say, who acknowledged them and where to look") {
  const mill::Story story = mill::drifting();
  const Markup page = read_markup(body_of(story, "/"));
  const auto lost = page.text.find("no longer agree"), unstable = page.text.find("the level shifted up");
  REQUIRE(lost != std::string::npos);
  REQUIRE(unstable != std::string::npos);
  CHECK(lost < unstable);
  CHECK(page.text.find("What to do next: use line1 for release") != std::string::npos);
  CHECK(page.text.find("Acknowledged by M. Fell") != std::string::npos);
  CHECK(page.text.find("make a token with agreed token CONFIG --role operator") != std::string::npos);
  CHECK(body_of(story, "/alerts").find("href=\"/charts/line2/wheat-low/protein\"") != std::string::npos);
  CHECK(body_of(mill::agreeing(), "/alerts").find("it came") != std::string::npos);
}

TEST_CASE("of many comparisons all are listed and only those that need a look are drawn") {
  const mill::Story story = mill::many(40);
  const std::string body = body_of(story, "/");
  for (const auto& comparison : story.snapshot.settings->comparisons)
    CHECK(body.find("href=\"/comparisons/" + comparison.id + "\"") != std::string::npos);
  CHECK(body.find("id=\"pairs." + story.snapshot.settings->comparisons[4].id + "\"") != std::string::npos);
  CHECK(body.find("id=\"pairs." + story.snapshot.settings->comparisons[5].id + "\"") == std::string::npos);
  CHECK(body.size() < 400'000);
}
