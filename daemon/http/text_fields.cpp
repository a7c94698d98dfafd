#include "daemon/http/text_fields.hpp"

#include <algorithm>
#include <set>

#include <nlohmann/json.hpp>

#include "daemon/intake/nearest_known.hpp"
#include "daemon/intake/text.hpp"

namespace agreed {
namespace {

constexpr int kDeepest = 2;

bool is_among(std::span<const std::string_view> names, std::string_view name) {
  return std::find(names.begin(), names.end(), name) != names.end();
}

TextFields wrong(std::string field, std::string what) {
  return {{}, std::move(field), std::move(what)};
}

/// Listens to the parser: stops it when it goes too deep, keeps a name that comes twice.
class Watch {
 public:
  bool operator()(int depth, nlohmann::json::parse_event_t event, const nlohmann::json& parsed) {
    too_deep = too_deep || depth > kDeepest;
    if (event == nlohmann::json::parse_event_t::key && depth == 1) {
      std::string name = parsed.get<std::string>();
      if (!names_.insert(name).second) twice = std::move(name);
    }
    return !too_deep;
  }

  bool too_deep = false;
  std::string twice;

 private:
  std::set<std::string> names_;
};

}  // namespace

const std::string& TextFields::operator[](std::string_view name) const {
  static const std::string kNothing;
  const auto found = texts.find(name);
  return found == texts.end() ? kNothing : found->second;
}

TextFields read_text_fields(const std::string& body, std::span<const std::string_view> known,
                            std::span<const std::string_view> may_be_null) {
  Watch watch;
  const auto listen = [&watch](int depth, nlohmann::json::parse_event_t event, nlohmann::json& parsed) {
    return watch(depth, event, parsed);
  };
  const nlohmann::json json = nlohmann::json::parse(body, listen, false);
  if (watch.too_deep || !json.is_object()) return wrong("", "The body is not a JSON object.");
  if (!watch.twice.empty())
    return wrong(watch.twice, "The field " + in_quotes(watch.twice) + " is there twice.");
  TextFields read;
  for (const auto& [name, value] : json.items()) {
    if (!is_among(known, name))
      return wrong(name, "There is no field " + in_quotes(name) + "; " +
                             known_hint(name, {known.begin(), known.end()}) + ".");
    if (value.is_null() && is_among(may_be_null, name)) continue;
    if (!value.is_string()) return wrong(name, "The field " + name + " is not text.");
    read.texts.emplace(name, value.get<std::string>());
  }
  return read;
}

}  // namespace agreed
