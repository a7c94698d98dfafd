// Letters and numbers as text: what every other text of the service is made of.
#include <cmath>
#include <limits>

#include <doctest/doctest.h>

#include "core/base/ascii.hpp"
#include "core/base/number_text.hpp"

using namespace agreed;

TEST_CASE("letters are told apart and lowered within ASCII only") {
  CHECK(ascii::lower("Wheat-LOW \xC3\x84") == "wheat-low \xC3\x84");
  CHECK(ascii::same_letters("Bearer", "bEARER"));
  CHECK_FALSE(ascii::same_letters("bearer", "bearer "));
  CHECK(ascii::is_letter_or_digit('Z'));
  CHECK_FALSE(ascii::is_letter_or_digit('_'));
}

TEST_CASE("blanks go at both ends and stay inside") {
  CHECK(ascii::trimmed(" \ta b\t ") == "a b");
  CHECK(ascii::trimmed("\n x", " ") == "\n x");
  CHECK(ascii::trimmed(" \t ") == "");
  CHECK(ascii::trimmed("") == "");
}

TEST_CASE("a number that rounds to zero has no sign") {
  CHECK(fixed(-0.004, 2) == "0.00");
  CHECK(fixed(-0.006, 2) == "-0.01");
  CHECK(fixed(-0.4, 0) == "0");
}

TEST_CASE("the longest number has room") {
  CHECK(fixed(-std::numeric_limits<double>::max(), 64).size() == 1 + 309 + 1 + 64);
}

TEST_CASE("infinity keeps its sign") {
  CHECK(fixed(-INFINITY, 2) == "-inf");
}

TEST_CASE("digits are as many as asked for, or as needed to read the same number back") {
  CHECK(significant(0.123456, 3) == "0.123");
  CHECK(significant(1234567, 4) == "1.235e+06");
  CHECK(exact(0.1) == "0.1");
  CHECK(exact(0.1 + 0.2) == "0.30000000000000004");
}

TEST_CASE("one is written in the singular, whatever lies behind it") {
  CHECK(counted(1, "pair", "pairs") == "1 pair");
  CHECK(counted(0, "pair", "pairs") == "0 pairs");
  CHECK(counted(1.4, "day", "days") == "1 day");
}
