#include "core/alert/collected.hpp"

#include <limits>

#include <doctest/doctest.h>

#include "core/alert/details.hpp"

using namespace agreed;

TEST_CASE("kinds that only an acknowledgement resolves, and where they collect") {
  int resolving = 0;
  for (int i = 0; i < 16; ++i) resolving += resolves_on_acknowledgement(static_cast<AlertKind>(i)) ? 1 : 0;
  CHECK(resolving == 4);
  CHECK(collected_list(AlertKind::pair_outlier) == std::string("samples"));
  CHECK(collected_list(AlertKind::file_rejected) == std::string("files"));
  CHECK(collected_list(AlertKind::readings_conflict) == std::string("items"));
  CHECK(collected_list(AlertKind::unpaired_samples) == std::string("items"));
  CHECK(collected_list(AlertKind::agreement_lost) == std::string());
}

TEST_CASE("a collected list names each thing once, newest last, and counts every happening") {
  const AlertKind kind = AlertKind::file_rejected;
  Details details = collect(kind, {}, {{"file", "a.csv"}, {"line", 3.0}});
  CHECK(number_in(details, "count") == 1.0);
  details = collect(kind, details, {{"file", "b.csv"}});
  CHECK_FALSE(number_in(details, "line"));  // it was a.csv's
  details = collect(kind, details, {{"file", "a.csv"}, {"line", 9.0}});
  CHECK(list_in(details, "files") == std::vector<std::string>{"b.csv", "a.csv"});
  CHECK(number_in(details, "count") == 3.0);
  CHECK(number_in(details, "line") == 9.0);
}

TEST_CASE("a finding that lists several happenings counts them all") {
  const Details two = {{"items", std::vector<std::string>{"S-1", "S-2"}}};
  const Details details = collect(AlertKind::unpaired_samples, collect(AlertKind::unpaired_samples, {}, two),
                                  {{"sample", "S-3"}});
  CHECK(list_in(details, "items") == std::vector<std::string>{"S-1", "S-2", "S-3"});
  CHECK(number_in(details, "count") == 3.0);
}

TEST_CASE("a collected list keeps the newest thousand and counts on") {
  Details details;
  for (int i = 0; i < 1500; ++i)
    details = collect(AlertKind::pair_outlier, details, {{"sample", "S-" + std::to_string(i)}});
  const auto samples = list_in(details, "samples");
  REQUIRE(samples.size() == kMostCollected);
  CHECK(samples.front() == "S-500");
  CHECK(samples.back() == "S-1499");
  CHECK(number_in(details, "count") == 1500.0);
}

TEST_CASE("a detail that is missing, of another kind, empty or not finite gives nothing") {
  const Details details = {{"n", std::numeric_limits<double>::quiet_NaN()},
                           {"i", std::numeric_limits<double>::infinity()},
                           {"t", std::string()},
                           {"x", 1.5}};
  CHECK_FALSE(number_in(details, "n"));
  CHECK_FALSE(number_in(details, "i"));
  CHECK_FALSE(number_in(details, "t"));
  CHECK_FALSE(number_in(details, "other"));
  CHECK_FALSE(text_in(details, "t"));
  CHECK_FALSE(text_in(details, "x"));
  CHECK(list_in(details, "x").empty());
  CHECK(number_in(details, "x") == 1.5);
}
