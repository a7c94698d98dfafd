#pragma once
// One value against its row of the schema.
#include <optional>
#include <string>
#include <string_view>

#include "config/schema.hpp"

namespace agreed::settings_file {

/// Can be used; of a list or map of texts: as an element of it.
[[nodiscard]] bool is_good(const SettingRow& row, std::string_view text);

/// "a whole number from 0 to 12"
[[nodiscard]] std::string expected(const SettingRow& row);
/// The same of one element of a list.
[[nodiscard]] std::string expected_element(const SettingRow& row);

/// What an id looks like.
[[nodiscard]] std::string expected_id();

/// "found ..., expected ..."; nothing if the value can be used.
[[nodiscard]] std::optional<std::string> complaint(const SettingRow& row, std::string_view text);
[[nodiscard]] std::optional<std::string> element_complaint(const SettingRow& row, std::string_view text);

}  // namespace agreed::settings_file
