// The text format itself: what is escaped, what is refused.
#include "daemon/render/open_metrics.hpp"

#include <array>
#include <cmath>
#include <limits>
#include <stdexcept>

#include <doctest/doctest.h>

using namespace agreed;
using enum MetricType;

TEST_CASE("the specification's own examples come out byte for byte") {
  // OpenMetrics 1.0.0, "Overall structure", "UTF-8 and escaping" and the examples of each type; from memory.
  OpenMetrics out;
  out.begin({"acme_http_router_request_seconds", counter, "seconds",
             "Latency though all of ACME's HTTP request router."});
  out.sample({{"path", "/api/v1"}, {"method", "GET"}}, 9036.32);
  out.begin({"foo", gauge, "", "Contains a \"quoted\" word,\na line end and a \\."});
  out.sample({{"a", "x\"y\\z\nw"}}, 17);
  out.begin({"build", info, "", "."});
  out.info({{"entity", "controller"}, {"name", "pretty name"}, {"version", "8.2.7"}});
  out.begin({"feature", state_set, "", "."});
  out.states({}, std::array<std::string_view, 3>{"a", "bb", "ccc"}, "bb");
  CHECK(out.text() ==
        "# TYPE acme_http_router_request_seconds counter\n"
        "# UNIT acme_http_router_request_seconds seconds\n"
        "# HELP acme_http_router_request_seconds Latency though all of ACME's HTTP request router.\n"
        "acme_http_router_request_seconds_total{path=\"/api/v1\",method=\"GET\"} 9036.32\n"
        "# TYPE foo gauge\n"
        "# HELP foo Contains a \\\"quoted\\\" word,\\na line end and a \\\\.\n"
        "foo{a=\"x\\\"y\\\\z\\nw\"} 17\n"
        "# TYPE build info\n"
        "# HELP build .\n"
        "build_info{entity=\"controller\",name=\"pretty name\",version=\"8.2.7\"} 1\n"
        "# TYPE feature stateset\n"
        "# HELP feature .\n"
        "feature{feature=\"a\"} 0\n"
        "feature{feature=\"bb\"} 1\n"
        "feature{feature=\"ccc\"} 0\n"
        "# EOF\n");
}

TEST_CASE("numbers read back as the same; what is none makes no sample") {
  OpenMetrics out;
  out.begin({"n", gauge, "", "."});
  out.sample({}, 1767592800.123);
  out.sample({}, 100000);
  out.sample({}, -0.0);
  out.sample({}, -1.5e-7);
  out.sample({}, 3e20);
  out.sample({}, std::nullopt);
  out.sample({}, std::nan(""));
  out.sample({}, std::numeric_limits<double>::infinity());
  CHECK(out.text() ==
        "# TYPE n gauge\n# HELP n .\nn 1767592800.123\nn 100000\nn 0\nn -1.5e-07\nn 3e+20\n# EOF\n");
}

TEST_CASE("what the format forbids is refused") {
  const auto begin = [](const MetricFamily& family) { OpenMetrics().begin(family); };
  for (const char* name : {"", "1a", "a-b", "a b", "a.b", "\xc3\xa4", "a_total", "a_info"}) {
    CAPTURE(name);
    CHECK_THROWS_AS(begin({name, gauge, "", "."}), std::invalid_argument);
  }
  CHECK_THROWS_AS(begin({"a_seconds", gauge, "bytes", "."}), std::invalid_argument);
  CHECK_THROWS_AS(begin({"seconds", gauge, "seconds", "."}), std::invalid_argument);
  CHECK_THROWS_AS(begin({"a_seconds", info, "seconds", "."}), std::invalid_argument);
  OpenMetrics out;
  out.begin({"a", counter, "", "."});
  CHECK_THROWS_AS(out.begin({"a", gauge, "", "."}), std::invalid_argument);
  CHECK_THROWS_AS(out.sample({}, -1), std::invalid_argument);
  CHECK_THROWS_AS(out.sample({{"b-c", "d"}}, 1), std::invalid_argument);
  CHECK_THROWS_AS(out.states({}, std::array<std::string_view, 1>{"on"}, "off"), std::invalid_argument);
}
