#include "daemon/render/page_text.hpp"

#include <limits>

#include <doctest/doctest.h>

#include "core/base/rfc3339.hpp"
#include "daemon/render/svg_plot.hpp"
#include "daemon/render/svg_ticks.hpp"

namespace {
using namespace agreed;

double axis(const char* time) {
  return static_cast<double>(parse_rfc3339(time)->at.time_since_epoch().count());
}

std::string labels(const std::vector<Tick>& ticks) {
  std::string out;
  for (const Tick& tick : ticks) out += (out.empty() ? "" : "|") + tick.label;
  return out;
}

}  // namespace

TEST_CASE("markup and control characters are escaped, also within attributes") {
  CHECK(escaped("a<b>&\"'\x01\n") == "a&lt;b&gt;&amp;&quot;&#39;  ");
  CHECK(escaped("µg/L – ü") == "µg/L – ü");
  CHECK(path_segment("a b/ü") == "a%20b%2F%C3%BC");
  CHECK(flowing_html("<at 2026-02-03 06:00 UTC>") ==
        "&lt;at <span class=\"whole\">2026-02-03 06:00 UTC</span>&gt;");
}

TEST_CASE("a text is cut between characters, never within one") {
  CHECK(shortened("abc", 3) == "abc");
  CHECK(shortened("abcd", 3) == "abc…");
  CHECK(shortened("üüüü", 2) == "üü…");
}

TEST_CASE("numbers: rounding, true minus, no minus zero, no NaN") {
  CHECK(shown(10.6204, 3) == "10.620");
  CHECK(shown(-0.0004, 3) == "0.000");
  CHECK(shown(-0.26, 3) == "\u22120.260");
  CHECK(shown_signed(0.02, 3) == "+0.020");
  CHECK(shown_signed(0.0001, 3) == "0.000");
  CHECK(shown(std::numeric_limits<double>::quiet_NaN(), 3) == "not known");
  CHECK(shown_signed(std::numeric_limits<double>::infinity(), 3) == "not known");
  CHECK(shortest(13.0) == "13");
  CHECK(shortest(10.5) == "10.5");
}

TEST_CASE("a measurand's decimals decide, else the scale gets three significant digits") {
  Measurand measurand;
  measurand.decimals = 2;
  CHECK(number_style(measurand, 100.0).decimals == 3);
  measurand.decimals.reset();
  CHECK(number_style(measurand, 0.25).decimals == 3);
  CHECK(number_style(measurand, 12.0).decimals == 1);
  CHECK(number_style(measurand, 5000.0).decimals == 0);
  CHECK(number_style(measurand, std::nullopt).decimals == 3);
}

TEST_CASE("a share below one is never shown as all, one above zero never as none") {
  CHECK(shown_share(1.0) == "100\u00a0%");
  CHECK(shown_share(0.99999) == "more than 99.9\u00a0%");
  CHECK(shown_share(0.994) == "99.4\u00a0%");
  CHECK(shown_share(0.98) == "98\u00a0%");
  CHECK(shown_share(1e-9) == "less than 0.1\u00a0%");
  CHECK(shown_share(0) == "0\u00a0%");
}

TEST_CASE("spans of time") {
  using namespace std::chrono;
  CHECK(shown_span(seconds(20)) == "a moment");
  CHECK(shown_span(minutes(25)) == "25 min");
  CHECK(shown_span(hours(30)) == "30 h");
  CHECK(shown_span(hours(24 * 12)) == "12 days");
}

TEST_CASE("value ticks are round, inside the axis, and alike in their decimals") {
  CHECK(labels(value_ticks(-0.23, 0.23, 5)) == "\u22120.2|\u22120.1|0.0|0.1|0.2");
  CHECK(labels(value_ticks(10.47, 10.74, 3)) == "10.5|10.6|10.7");
  CHECK(labels(value_ticks(0, 1000, 4)) == "0|200|400|600|800|1000");
  CHECK(value_ticks(1, 1, 5).empty());
  CHECK(value_ticks(0, std::numeric_limits<double>::infinity(), 5).empty());
  CHECK(value_ticks(1e15, 1e15 + 1, 5).size() < 10);
}

TEST_CASE("time ticks are round in UTC from minutes to years, never more than asked for") {
  CHECK(labels(time_ticks(axis("2026-02-02T20:10:00Z"), axis("2026-02-03T09:00:00Z"), 6)) ==
        "21:00|3 Feb|03:00|06:00|09:00");
  CHECK(labels(time_ticks(axis("2026-01-30T00:00:00Z"), axis("2026-02-03T00:00:00Z"), 6)) ==
        "30 Jan|31 Jan|1 Feb|2 Feb|3 Feb");
  CHECK(labels(time_ticks(axis("2025-11-15T00:00:00Z"), axis("2026-02-20T00:00:00Z"), 4)) ==
        "Dec 2025|Jan 2026|Feb 2026");
  for (const double width : {1e3, 6e4, 3.6e6, 8.64e7, 9e8, 2.6e9, 3.1e10, 6e11}) {
    const auto ticks = time_ticks(axis("2026-01-05T06:00:00Z"), axis("2026-01-05T06:00:00Z") + width, 5);
    CAPTURE(width);
    CHECK(ticks.size() <= 5);
  }
  CHECK(time_ticks(0, 1e300, 5).empty());
}

TEST_CASE("a plot of one single value, or of values too far for it, stays drawable") {
  ExtentOf one;
  one.add(5);
  one.add(std::numeric_limits<double>::quiet_NaN());
  const Extent extent = one.padded(0.1);
  CHECK(extent.low < 5);
  CHECK(extent.high > 5);
  CHECK(one.padded(0.1, 100).high - one.padded(0.1, 100).low == doctest::Approx(100));
  Plot plot("p", {}, extent, {0, 1});
  plot.line({{5, 1e300}, {5, -1e300}}, "trend");
  const std::string svg = plot.svg("a <title>", "what it shows");
  CHECK(svg.find("inf") == std::string::npos);
  CHECK(svg.find("e+") == std::string::npos);
  CHECK(svg.find("a &lt;title&gt;") != std::string::npos);
  CHECK(svg.find("aria-labelledby=\"p.title p.desc\"") != std::string::npos);
}
