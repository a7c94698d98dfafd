#pragma once
// A small strict reader of the page's markup, for tests: finds what is not well formed and collects the
// elements.
#include <map>
#include <string>
#include <string_view>
#include <vector>

namespace agreed {

struct Element {
  std::string name;
  std::map<std::string, std::string> attributes;  ///< as written, references not resolved
  std::string parent;
};

struct Markup {
  std::vector<std::string> faults;  ///< empty: well formed
  std::vector<Element> elements;
  std::string text;  ///< all character data, references resolved

  [[nodiscard]] std::size_t count(std::string_view name) const;
};

/// Expects quoted attributes, every element closed, references for & and <; accepts no comment, no CDATA.
[[nodiscard]] Markup read_markup(std::string_view html);

}  // namespace agreed
