// The colours of the style sheet keep their contrast, in light, dark and print: text 4.5:1, what must be told
// apart in a drawing 3:1 (WCAG 2.2, success criteria 1.4.3 and 1.4.11; relative luminance as defined there).
#include <cmath>
#include <map>
#include <string>
#include <vector>

#include <doctest/doctest.h>

#include "daemon/render/page_assets.hpp"

namespace {

using Palette = std::map<std::string, std::string>;

/// The variables set in the `number`-th block that begins with ":root {".
Palette palette(std::string_view css, int number) {
  std::size_t at = 0;
  for (int i = 0; i <= number; ++i) {
    at = css.find(":root {", at);
    REQUIRE(at != std::string_view::npos);
    at += 7;
  }
  const std::string_view block = css.substr(at, css.find('}', at) - at);
  Palette out;
  for (std::size_t dash = block.find("--"); dash != std::string_view::npos;
       dash = block.find("--", dash + 2)) {
    const std::size_t colon = block.find(':', dash), end = block.find(';', colon);
    out[std::string(block.substr(dash + 2, colon - dash - 2))] = block.substr(colon + 2, end - colon - 2);
  }
  return out;
}

double luminance(const std::string& colour) {
  REQUIRE(colour[0] == '#');
  REQUIRE((colour.size() == 7 || colour.size() == 4));
  const std::size_t digits = colour.size() == 7 ? 2 : 1;
  double parts[3];
  for (std::size_t i = 0; i < 3; ++i) {
    std::string hex = colour.substr(1 + i * digits, digits);
    if (digits == 1) hex += hex;
    const double value = std::stoi(hex, nullptr, 16) / 255.0;
    parts[i] = value <= 0.04045 ? value / 12.92 : std::pow((value + 0.055) / 1.055, 2.4);
  }
  return 0.2126 * parts[0] + 0.7152 * parts[1] + 0.0722 * parts[2];
}

double contrast(const std::string& a, const std::string& b) {
  const double la = luminance(a), lb = luminance(b);
  return (std::max(la, lb) + 0.05) / (std::min(la, lb) + 0.05);
}

}  // namespace

TEST_CASE("contrast of the palette in light, dark and print") {
  CHECK(contrast("#000", "#ffffff") == doctest::Approx(21));
  const std::vector<std::pair<std::string, std::string>> text = {
      {"ink", "paper"},       {"ink", "sheet"},         {"quiet", "paper"},  {"quiet", "sheet"},
      {"link", "paper"},      {"link", "sheet"},        {"on", "yes"},       {"on", "no"},
      {"on", "notyet"},       {"on", "starting"},       {"yes", "paper"},    {"no", "sheet"},
      {"notyet", "sheet"},    {"starting", "sheet"},    {"ink", "yes-tint"}, {"ink", "no-tint"},
      {"ink", "notyet-tint"}, {"ink", "starting-tint"}, {"signal", "sheet"}, {"event", "sheet"}};
  std::vector<std::pair<std::string, std::string>> graphics = {{"frame", "sheet"}, {"past", "sheet"}};
  for (const char* mark : {"data", "line", "limit", "allowed-edge", "signal", "event", "reference"})
    for (const char* ground : {"sheet", "allowed", "expected", "learning", "doubt"})
      if (std::string(mark) != "allowed-edge" || std::string(ground) != "doubt")
        graphics.emplace_back(mark, ground);
  for (int block = 0; block < 3; ++block) {
    CAPTURE(block);
    const Palette colours = palette(agreed::page_style_sheet(), block);
    const auto check = [&](const auto& pairs, double least) {
      for (const auto& [front, ground] : pairs) {
        CAPTURE(front);
        CAPTURE(ground);
        CHECK(contrast(colours.at(front), colours.at(ground)) >= least);
      }
    };
    check(text, 4.5);
    check(graphics, 3.0);
  }
}
