#pragma once
// A request body that is one JSON object of texts.
#include <map>
#include <span>
#include <string>
#include <string_view>

namespace agreed {

struct TextFields {
  std::map<std::string, std::string, std::less<>> texts;  ///< by name, those that were given
  std::string field;  ///< which field is at fault; empty: the body as a whole
  std::string error;  ///< what is wrong with the body; empty when nothing is

  /// The text of a field; empty when it was not given.
  [[nodiscard]] const std::string& operator[](std::string_view name) const;
};

/// Reads an object of the `known` names. A name that is not known or there twice and a value that is no text
/// are errors, so that nothing misspelt is lost unseen; null is a field not given for those `may_be_null`.
[[nodiscard]] TextFields read_text_fields(const std::string& body, std::span<const std::string_view> known,
                                          std::span<const std::string_view> may_be_null = {});

}  // namespace agreed
