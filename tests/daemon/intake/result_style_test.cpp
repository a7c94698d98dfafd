#include "daemon/intake/result_style.hpp"

#include <random>

#include <doctest/doctest.h>

#include "daemon/intake/result_text.hpp"

using namespace agreed;

namespace {

std::string plain(const ResultStyle& style, const std::string& text) {
  std::string room;
  return std::string(style.plain(text, room));
}

}  // namespace

TEST_CASE("numbers of another style become plain ones, or no result") {
  const ResultStyle comma(',', ".", 1), space('.', " ", 1), plain_style('.', "", 1), comma_only(',', "", 1);
  CHECK(plain(comma, "1.234,5") == "1234.5");
  CHECK(plain(comma, "<1.234.567,5") == "<1234567.5");
  CHECK(plain(comma, "> -12,5e-3") == "> -12.5e-3");
  CHECK(plain(comma, "1234,5") == "1234.5");
  CHECK(plain(comma, ",5") == ".5");
  CHECK(plain(comma, "") == "");
  for (const char* wrong : {"1.23", "12.34,5", "1234.567", ".123", "1..234", "1.2345", "1,2,3", "1,234.5",
                            "12,5x", "n/a", "1.234.", "0x1", "<<"})
    CHECK_MESSAGE(!parse_result(plain(comma, wrong)), wrong);
  CHECK(plain(space, "12 345.6") == "12345.6");
  CHECK(plain(space,
              "12\xC2\xA0"
              "345.6") == "12345.6");
  CHECK(plain(space,
              "12\xE2\x80\xAF"
              "345.6") == "12345.6");
  CHECK(plain(plain_style, " 10.61 ") == "10.61");
  CHECK_FALSE(parse_result(plain(plain_style, "10,61")));
  CHECK_FALSE(parse_result(plain(comma_only, "10.61")));
  CHECK(comma.example() == "12,34, <0,05 or >20");
}

TEST_CASE("a factor multiplies; a power of ten only moves the decimal sign") {
  const auto value = [](double factor, const std::string& text) {
    const auto read = parse_result(plain(ResultStyle('.', "", factor), text));
    REQUIRE(read);
    return read->value;
  };
  CHECK(value(0.1, "141.7") == 14.17);
  CHECK(value(100, "0.07") == 7.0);  // 0.07 * 100 is 7.000000000000001
  CHECK(value(1000, "1.5e2") == 150'000.0);
  CHECK(value(2.5, "4") == 10.0);
  CHECK(value(1.8, "<5") == 9.0);
  CHECK(plain(ResultStyle('.', "", 1.8), "<5") == "<9");
  CHECK_FALSE(parse_result(plain(ResultStyle('.', "", 10), "1e308")));
  CHECK_FALSE(parse_result(plain(ResultStyle('.', "", 3), "1e308")));
  CHECK_FALSE(parse_result(plain(ResultStyle('.', "", 3), "x")));
}

TEST_CASE("random numbers written with commas and points come back bit for bit") {
  std::mt19937 random(7481);
  for (int i = 0; i < 2'000; ++i) {
    const std::string whole = std::to_string(random() % 100'000'000),
                      decimals = std::to_string(random() % 10'000);
    std::string grouped = whole;
    for (int at = static_cast<int>(whole.size()) - 3; at > 0; at -= 3)
      grouped.insert(static_cast<std::size_t>(at), ".");
    const auto expected = parse_result(whole + "." + decimals);
    const auto read = parse_result(plain(ResultStyle(',', ".", 1), grouped + "," + decimals));
    REQUIRE(read);
    CHECK(read->value == expected->value);
  }
}
