#include "page_markup.hpp"

#include <algorithm>
#include <array>

namespace agreed {
namespace {

constexpr std::array<std::string_view, 3> kVoid = {"meta", "link", "br"};

class Reader {
 public:
  explicit Reader(std::string_view html) : html_(html) {}

  Markup read() {
    if (html_.starts_with("<!DOCTYPE html>\n"))
      at_ = 16;
    else
      fault("no document type");
    while (at_ < html_.size()) html_[at_] == '<' ? tag() : text();
    for (const std::string& open : open_) fault("never closed: " + open);
    return std::move(markup_);
  }

 private:
  void fault(const std::string& what) {
    markup_.faults.push_back(what + " at byte " + std::to_string(at_) + ": " +
                             std::string(html_.substr(at_ < 40 ? 0 : at_ - 40, 90)));
  }

  void text() {
    const std::size_t end = std::min(html_.find('<', at_), html_.size());
    while (at_ < end) {
      if (html_[at_] == '&')
        markup_.text += reference();
      else
        markup_.text += html_[at_++];
    }
  }

  std::string reference() {
    constexpr std::array<std::pair<std::string_view, char>, 5> known = {
        {{"&amp;", '&'}, {"&lt;", '<'}, {"&gt;", '>'}, {"&quot;", '"'}, {"&#39;", '\''}}};
    for (const auto& [name, character] : known)
      if (html_.substr(at_).starts_with(name)) {
        at_ += name.size();
        return std::string(1, character);
      }
    fault("bare ampersand");
    ++at_;
    return "&";
  }

  static bool name_character(char c) {
    return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') || c == '-';
  }

  std::string name() {
    const std::size_t from = at_;
    while (at_ < html_.size() && name_character(html_[at_])) ++at_;
    if (at_ == from) fault("no name");
    return std::string(html_.substr(from, at_ - from));
  }

  void closing() {
    at_ += 2;
    const std::string closed = name();
    if (open_.empty() || open_.back() != closed)
      fault("closes " + closed + " within " + (open_.empty() ? "nothing" : open_.back()));
    else
      open_.pop_back();
    if (at_ >= html_.size() || html_[at_++] != '>') fault("closing tag is not closed");
  }

  void tag() {
    if (html_.substr(at_).starts_with("</")) return closing();
    ++at_;
    Element element{name(), {}, open_.empty() ? "" : open_.back()};
    bool self_closed = false;
    while (at_ < html_.size() && html_[at_] != '>') {
      if (html_[at_] == ' ')
        attribute(element);
      else if (html_.substr(at_).starts_with("/>"))
        self_closed = true, ++at_;
      else
        fault("strange character in a tag"), ++at_;
    }
    ++at_;
    const bool is_void = std::find(kVoid.begin(), kVoid.end(), element.name) != kVoid.end();
    if (!is_void && !self_closed) open_.push_back(element.name);
    markup_.elements.push_back(std::move(element));
  }

  void attribute(Element& element) {
    ++at_;
    const std::string key = name();
    std::string value;
    if (html_.substr(at_).starts_with("=\"")) {
      at_ += 2;
      const std::size_t end = html_.find('"', at_);
      if (end == std::string_view::npos) {
        fault("attribute is not closed");
        at_ = html_.size();
        return;
      }
      value = html_.substr(at_, end - at_);
      if (value.find('<') != std::string::npos) fault("< in an attribute");
      at_ = end + 1;
    } else if (key != "hidden" && key != "defer") {
      fault("attribute without a quoted value: " + key);
    }
    if (!element.attributes.emplace(key, value).second) fault("attribute twice: " + key);
  }

  std::string_view html_;
  std::size_t at_ = 0;
  std::vector<std::string> open_;
  Markup markup_;
};

}  // namespace

std::size_t Markup::count(std::string_view name) const {
  return static_cast<std::size_t>(
      std::count_if(elements.begin(), elements.end(), [&](const Element& e) { return e.name == name; }));
}

Markup read_markup(std::string_view html) {
  return Reader(html).read();
}

}  // namespace agreed
