#include "daemon/intake/json_rows.hpp"

#include "daemon/intake/line_splitter.hpp"
#include "daemon/intake/text.hpp"

namespace agreed {
namespace {

constexpr std::string_view kByteOrderMark = "\xEF\xBB\xBF";
constexpr std::string_view kJsonSpace = " \t\r\n";

class JsonLines final : public RowFormat {
 public:
  JsonLines(JsonShape shape, ObjectTaker& taker) : objects_(shape, taker), taker_(taker) {}

  void feed(std::string_view block) override {
    lines_.feed(block, [this](std::string_view line, std::uint32_t number, bool too_long) {
      return take(line, number, too_long);
    });
  }

  void finish(bool closed) override {
    if (lines_.has_rest() && !closed) {
      any_ = true;
      taker_.bad(bad_row(lines_.next_line(), 0, lines_.rest(),
                         "the last line has no line end, so it may be incomplete"));
    } else {
      lines_.finish([this](std::string_view line, std::uint32_t number, bool too_long) {
        return take(line, number, too_long);
      });
    }
    if (!any_) unusable_ = "the file is empty; lines of JSON were expected";
  }

 private:
  bool take(std::string_view line, std::uint32_t number, bool too_long) {
    if (number == 1 && line.starts_with(kByteOrderMark)) line.remove_prefix(kByteOrderMark.size());
    if (line.find_first_not_of(kJsonSpace) == std::string_view::npos) return true;
    any_ = true;
    if (too_long)
      taker_.bad(bad_row(number, 0, line, "the line is longer than 1 MiB"));
    else
      objects_.read(line, number);
    return true;
  }

  LineSplitter lines_;
  JsonObjectReader objects_;
  ObjectTaker& taker_;
  bool any_ = false;
};

/// Cuts the array into its elements by brackets and quotes alone; what an element holds is not looked at
/// here, so a wrong element costs no other as long as its brackets and quotes are balanced.
class JsonArray final : public RowFormat {
 public:
  JsonArray(JsonShape shape, ObjectTaker& taker) : objects_(shape, taker), taker_(taker) {}

  void feed(std::string_view block) override {
    while (!block.empty() && unusable_.empty()) {
      const std::size_t plain = in_string_ && !escape_ ? plain_run(block) : 0;
      if (plain > 0) {
        keep(block.substr(0, plain));
      } else {
        take(block.front());
        if (block.front() == '\n') ++line_;
      }
      block.remove_prefix(plain > 0 ? plain : 1);
    }
  }

  void finish(bool) override {
    if (!unusable_.empty() || state_ == State::after) return;
    if (state_ == State::before) {
      unusable_ = "the file is empty; a JSON array was expected";
      return;
    }
    taker_.bad(bad_row(element_.empty() ? line_ : element_line_, 0, element_,
                       "the array is not closed by ]; the file may be cut off"));
  }

 private:
  enum class State { before, inside, after };

  /// How many characters of a string come before one that means something.
  static std::size_t plain_run(std::string_view text) {
    std::size_t size = 0;
    while (size < text.size() && text[size] != '"' && text[size] != '\\' && text[size] != '\n') ++size;
    return size;
  }

  void take(char c) {
    switch (state_) {
      case State::before:
        return take_before(c);
      case State::inside:
        return in_string_ ? take_in_string(c) : take_inside(c);
      case State::after:
        if (kJsonSpace.find(c) != std::string_view::npos || told_after_) return;
        told_after_ = true;
        taker_.bad(bad_row(line_, 0, {&c, 1}, "text after the end of the array"));
    }
  }

  void take_before(char c) {
    if (mark_ < kByteOrderMark.size() && c == kByteOrderMark[mark_]) {
      ++mark_;
    } else if (c == '[') {
      state_ = State::inside;
    } else if (kJsonSpace.find(c) == std::string_view::npos) {
      unusable_ = "the file begins with " + in_quotes({&c, 1}) + "; a JSON array, thus \"[\", was expected";
    }
  }

  void take_inside(char c) {
    if (depth_ == 0 && (c == ',' || c == ']')) return end_element(c);
    if (element_.empty()) {
      if (kJsonSpace.find(c) != std::string_view::npos) return;
      element_line_ = line_;
    }
    if (c == '{' || c == '[') ++depth_;
    if (c == '}' || c == ']') depth_ -= depth_ > 0 ? 1 : 0;
    in_string_ = c == '"';
    keep({&c, 1});
  }

  void take_in_string(char c) {
    in_string_ = escape_ || c != '"';
    escape_ = !escape_ && c == '\\';
    keep({&c, 1});
  }

  void keep(std::string_view text) {
    const std::size_t room = kMostLineBytes - element_.size();
    too_long_ = too_long_ || text.size() > room;
    element_.append(text.substr(0, room));
  }

  void end_element(char c) {
    const bool lacks = element_.empty() && (c == ',' || any_);
    if (lacks)
      taker_.bad(bad_row(line_, 0, {}, "an object was expected before " + in_quotes({&c, 1})));
    else if (too_long_)
      taker_.bad(bad_row(element_line_, 0, element_, "the element is longer than 1 MiB"));
    else if (!element_.empty())
      objects_.read(element_, element_line_);
    element_.clear();
    too_long_ = false;
    any_ = true;
    if (c == ']') state_ = State::after;
  }

  JsonObjectReader objects_;
  ObjectTaker& taker_;
  State state_ = State::before;
  std::size_t mark_ = 0;  ///< bytes of the byte order mark seen
  std::string element_;
  bool any_ = false, too_long_ = false, in_string_ = false, escape_ = false, told_after_ = false;
  std::uint32_t line_ = 1, element_line_ = 1;
  std::size_t depth_ = 0;
};

/// Objects to rows of the plain format.
class PlainObjects final : public ObjectTaker {
 public:
  PlainObjects(const RowMaker& maker, RowTaker& taker) : maker_(maker), taker_(taker) {}

  void object(std::uint32_t line, std::string_view whole, std::span<const JsonMember> members) override {
    raw_.line = line;
    raw_.whole = whole;
    raw_.fields.fill({});
    raw_.others.clear();
    for (std::size_t i = 0; i < members.size(); ++i) {
      const auto column = static_cast<std::uint32_t>(i + 1);
      if (const auto known = plain_column(members[i].name))
        raw_.fields[static_cast<std::size_t>(*known)] = {members[i].text, column};
      else
        raw_.others.push_back({members[i].name, members[i].text, column});
    }
    maker_.make(raw_, taker_);
  }
  void bad(BadRow&& row) override { taker_.bad(std::move(row)); }

 private:
  const RowMaker& maker_;
  RowTaker& taker_;
  RawRow raw_;
};

}  // namespace

std::unique_ptr<RowFormat> make_json_line_objects(JsonShape shape, ObjectTaker& taker) {
  return std::make_unique<JsonLines>(shape, taker);
}

std::unique_ptr<RowFormat> make_json_array_objects(JsonShape shape, ObjectTaker& taker) {
  return std::make_unique<JsonArray>(shape, taker);
}

std::unique_ptr<RowFormat> make_json_line_rows(const RowMaker& maker, RowTaker& taker) {
  return std::make_unique<RowsThrough<PlainObjects>>(PlainObjects(maker, taker), [](PlainObjects& objects) {
    return make_json_line_objects(JsonShape::flat, objects);
  });
}

std::unique_ptr<RowFormat> make_json_array_rows(const RowMaker& maker, RowTaker& taker) {
  return std::make_unique<RowsThrough<PlainObjects>>(PlainObjects(maker, taker), [](PlainObjects& objects) {
    return make_json_array_objects(JsonShape::flat, objects);
  });
}

}  // namespace agreed
