#include "daemon/intake/json_object.hpp"

#include <algorithm>
#include <vector>

#include <nlohmann/json.hpp>

#include "daemon/intake/text.hpp"
#include "daemon/printable.hpp"

namespace agreed {
namespace {

constexpr std::size_t kMostDepth = 32;

/// Collects the members of one object; what cannot be read stops the parser, `problem` says why.
class Members final : public nlohmann::json_sax<nlohmann::json> {
 public:
  explicit Members(JsonShape shape) : nested_(shape == JsonShape::nested) {}

  void begin() {
    count_ = 0;
    open_.clear();
    arrays_ = 0;
    problem.clear();
  }
  [[nodiscard]] std::span<const JsonMember> all() const { return {members_.data(), count_}; }

  bool null() override { return put({}, false); }
  bool boolean(bool value) override { return put(value ? "true" : "false", false); }
  bool number_integer(number_integer_t value) override { return put(std::to_string(value), true); }
  bool number_unsigned(number_unsigned_t value) override { return put(std::to_string(value), true); }
  bool number_float(number_float_t, const string_t& as_written) override { return put(as_written, true); }
  bool string(string_t& value) override { return put(value, false); }
  bool binary(binary_t&) override { return false; }

  bool start_object(std::size_t) override {
    if (!open_.empty() && !nested_) return fail_nested("an object");
    if (open_.size() + arrays_ == kMostDepth) return fail("nested more than 32 deep");
    if (arrays_ > 0) {
      ++arrays_;
    } else {
      open_.push_back(open_.empty() ? "" : take_last_name() + '.');
    }
    return true;
  }
  bool end_object() override {
    if (arrays_ > 0)
      --arrays_;
    else
      open_.pop_back();
    return true;
  }
  bool start_array(std::size_t) override {
    if (open_.empty()) return fail("an array; an object was expected");
    if (!nested_) return fail_nested("an array");
    if (open_.size() + arrays_ == kMostDepth) return fail("nested more than 32 deep");
    if (arrays_++ == 0) (void)take_last_name();
    return true;
  }
  bool end_array() override {
    --arrays_;
    return true;
  }

  bool key(string_t& name) override {
    if (arrays_ > 0) return true;
    if (count_ == kMostColumns) return fail("more than 1000 names in one object");
    if (name.empty() || name.size() > kMostTextBytes || !is_clean_text(name))
      return fail("the name " + in_quotes(name) + " is empty, too long or no clean text");
    if (count_ == members_.size()) members_.emplace_back();
    JsonMember& member = members_[count_++];
    if (open_.size() == 1)
      member.name.swap(name);
    else
      member.name = open_.back() + name;
    member.text.clear();
    member.number = false;
    return true;
  }

  bool parse_error(std::size_t position, const std::string&, const nlohmann::detail::exception&) override {
    return fail("no valid JSON object: the text is wrong at byte " + std::to_string(position) + " of it");
  }

  std::string problem;

 private:
  bool put(std::string_view text, bool number) {
    if (open_.empty()) return fail("no object; an object of columns was expected");
    if (arrays_ > 0) return true;
    members_[count_ - 1].text.assign(text);
    members_[count_ - 1].number = number;
    return true;
  }
  bool fail(std::string words) {
    problem = std::move(words);
    return false;
  }
  bool fail_nested(const char* what) {
    return fail(in_quotes(members_[count_ - 1].name) + " holds " + what +
                "; a text or a number was expected");
  }
  /// The member whose value turns out to be an object or an array is none itself.
  std::string take_last_name() { return members_[--count_].name; }

  bool nested_;
  std::vector<JsonMember> members_;  ///< kept for their memory; the first `count_` count
  std::size_t count_ = 0;
  std::vector<std::string> open_;  ///< what the names of the open objects' members begin with
  std::size_t arrays_ = 0;         ///< open arrays, and what is open within them
};

/// A name that is there twice; empty if none is.
std::string_view repeated_name(std::span<const JsonMember> members, std::vector<std::string_view>& names) {
  names.clear();
  for (const JsonMember& member : members) names.emplace_back(member.name);
  std::sort(names.begin(), names.end());
  const auto twice = std::adjacent_find(names.begin(), names.end());
  return twice == names.end() ? std::string_view{} : *twice;
}

}  // namespace

struct JsonObjectReader::Impl {
  ObjectTaker& taker;
  Members members;
  std::vector<std::string_view> names;
};

JsonObjectReader::JsonObjectReader(JsonShape shape, ObjectTaker& taker)
    : impl_(new Impl{taker, Members(shape), {}}) {}
JsonObjectReader::~JsonObjectReader() = default;

void JsonObjectReader::read(std::string_view text, std::uint32_t line) {
  Members& members = impl_->members;
  members.begin();
  if (!nlohmann::json::sax_parse(text.begin(), text.end(), &members)) {
    const auto column = static_cast<std::uint32_t>(members.all().size());
    impl_->taker.bad(bad_row(line, column, text, members.problem));
    return;
  }
  if (const std::string_view twice = repeated_name(members.all(), impl_->names); !twice.empty()) {
    impl_->taker.bad(bad_row(line, 0, text, "the name " + in_quotes(twice) + " is there twice"));
    return;
  }
  impl_->taker.object(line, text, members.all());
}

}  // namespace agreed
