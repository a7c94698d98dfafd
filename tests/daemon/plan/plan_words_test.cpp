// Figures with their errors, spans of time and flowing lines.
#include "daemon/plan/plan_words.hpp"

#include <sstream>

#include <doctest/doctest.h>

using namespace agreed;
using namespace agreed::plan;
using namespace std::chrono_literals;

TEST_CASE("a figure has as many decimals as its error bears") {
  CHECK(with_error({66, 3.4}) == "66 +- 3");
  CHECK(with_error({66.4, 1.2}) == "66.4 +- 1.2");
  CHECK(with_error({4.25, 0.25}) == "4.2 +- 0.2");
  CHECK(with_error({6, 0.034}) == "6.00 +- 0.03");
  CHECK(with_error({1234, 56}) == "1234 +- 56");
  CHECK(with_error({2, 0}) == "2");
  CHECK(with_error({0.3, 0}) == "0.3");
  CHECK(percent_with_error({0.9213, 0.0091}) == "92.1 +- 0.9 %");
}

TEST_CASE("a span of time is in the unit that one would say it in") {
  CHECK(span_words(30s) == "30 s");
  CHECK(span_words(40min) == "40 min");
  CHECK(span_words(1h) == "1 h");
  CHECK(span_words(90min) == "90 min");
  CHECK(span_words(150min) == "2.5 h");
  CHECK(span_words(47h) == "47 h");
  CHECK(span_words(48h) == "2 days");
  CHECK(span_words(113h) == "4.7 days");
  CHECK(span_words(24h * 30) == "30 days");
  CHECK(span_words(2.5, 8h) == "20 h");
}

TEST_CASE("rows flow within 80 columns beside their label, and a long word stands alone") {
  Paper paper;
  std::string words;
  for (int i = 0; i < 60; ++i) words += "word ";
  paper.row("label", words);
  paper.row("  other", std::string(90, 'x') + " y");
  std::istringstream lines(paper.take());
  std::string line;
  int count = 0;
  while (std::getline(lines, line)) {
    ++count;
    if (line.find('x') == std::string::npos) CHECK(line.size() <= 80);
    CHECK(line.back() != ' ');
    if (count == 1) CHECK(line.substr(0, 15) == "label      word");
    if (count == 2) CHECK(line.substr(0, 15) == "           word");
  }
  CHECK(count ==
        5 + 2);  // 13 words of 5 columns fit into 69; a word too long for its line, and what follows it
}
