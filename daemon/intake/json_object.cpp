#include "daemon/intake/json_object.hpp"

#include <algorithm>
#include <array>

#include <nlohmann/json.hpp>

#include "daemon/intake/text.hpp"
#include "daemon/printable.hpp"

namespace agreed {
namespace {

/// Collects the members of one flat object; anything else stops the parser, `problem` says why.
class Members final : public nlohmann::json_sax<nlohmann::json> {
 public:
  struct Member {
    std::string name, text;
  };

  void begin() {
    count_ = 0;
    depth_ = 0;
    problem.clear();
  }
  [[nodiscard]] std::size_t size() const { return count_; }
  [[nodiscard]] const Member& operator[](std::size_t i) const { return members_[i]; }

  bool null() override { return put({}); }
  bool boolean(bool value) override { return put(value ? "true" : "false"); }
  bool number_integer(number_integer_t value) override { return put(std::to_string(value)); }
  bool number_unsigned(number_unsigned_t value) override { return put(std::to_string(value)); }
  bool number_float(number_float_t, const string_t& as_written) override { return put(as_written); }
  bool string(string_t& value) override { return put(value); }
  bool binary(binary_t&) override { return false; }

  bool start_object(std::size_t) override {
    return ++depth_ == 1 ||
           fail(in_quotes(last_name()) + " holds an object; a text or a number was expected");
  }
  bool end_object() override { return true; }
  bool start_array(std::size_t) override {
    if (depth_ == 0) return fail("an array; an object was expected");
    return fail(in_quotes(last_name()) + " holds an array; a text or a number was expected");
  }
  bool end_array() override { return true; }

  bool key(string_t& name) override {
    if (count_ == kMostColumns) return fail("more than 1000 names in one object");
    if (name.empty() || name.size() > kMostTextBytes || !is_clean_text(name))
      return fail("the name " + in_quotes(name) + " is empty, too long or no clean text");
    if (count_ == members_.size()) members_.emplace_back();
    members_[count_].name.swap(name);
    members_[count_++].text.clear();
    return true;
  }

  bool parse_error(std::size_t position, const std::string&, const nlohmann::detail::exception&) override {
    return fail("no valid JSON object: the text is wrong at byte " + std::to_string(position) + " of it");
  }

  std::string problem;

 private:
  bool put(std::string_view text) {
    if (depth_ == 0) return fail("no object; an object of columns was expected");
    members_[count_ - 1].text.assign(text);
    return true;
  }
  bool fail(std::string words) {
    problem = std::move(words);
    return false;
  }
  [[nodiscard]] std::string last_name() const { return members_[count_ - 1].name; }

  std::vector<Member> members_;  ///< kept for their memory; the first `count_` count
  std::size_t count_ = 0;
  int depth_ = 0;
};

/// A name that is there twice; empty if none is.
std::string_view repeated_name(const Members& members, std::vector<std::string_view>& names) {
  names.clear();
  for (std::size_t i = 0; i < members.size(); ++i) names.emplace_back(members[i].name);
  std::sort(names.begin(), names.end());
  const auto twice = std::adjacent_find(names.begin(), names.end());
  return twice == names.end() ? std::string_view{} : *twice;
}

}  // namespace

struct JsonObjectReader::Impl {
  const RowMaker& maker;
  RowTaker& taker;
  Members members;
  std::vector<std::string_view> names;
  RawRow raw;

  void fill_raw(std::string_view text, std::uint32_t line) {
    raw.line = line;
    raw.whole = text;
    raw.fields.fill({});
    raw.others.clear();
    for (std::size_t i = 0; i < members.size(); ++i) {
      const auto column = static_cast<std::uint32_t>(i + 1);
      if (const auto known = plain_column(members[i].name))
        raw.fields[static_cast<std::size_t>(*known)] = {members[i].text, column};
      else
        raw.others.push_back({members[i].name, members[i].text, column});
    }
  }
};

JsonObjectReader::JsonObjectReader(const RowMaker& maker, RowTaker& taker)
    : impl_(new Impl{maker, taker, {}, {}, {}}) {}
JsonObjectReader::~JsonObjectReader() = default;

void JsonObjectReader::read(std::string_view text, std::uint32_t line) {
  Members& members = impl_->members;
  members.begin();
  if (!nlohmann::json::sax_parse(text.begin(), text.end(), &members)) {
    impl_->taker.bad(bad_row(line, static_cast<std::uint32_t>(members.size()), text, members.problem));
    return;
  }
  if (const std::string_view twice = repeated_name(members, impl_->names); !twice.empty()) {
    impl_->taker.bad(bad_row(line, 0, text, "the name " + in_quotes(twice) + " is there twice"));
    return;
  }
  impl_->fill_raw(text, line);
  impl_->maker.make(impl_->raw, impl_->taker);
}

}  // namespace agreed
