#pragma once
// Looking things up in the details of a finding or an alert. A name that is missing, or holds another kind of
// value than asked for, gives nothing: the words of an alert are made of whatever is there.
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "core/base/finding.hpp"

namespace agreed {

/// A number; nothing for one that is not finite.
[[nodiscard]] std::optional<double> number_in(const Details& details, std::string_view name);
/// A text; nothing for an empty one.
[[nodiscard]] std::optional<std::string> text_in(const Details& details, std::string_view name);
/// A list; empty when there is none.
[[nodiscard]] std::vector<std::string> list_in(const Details& details, std::string_view name);

/// Replaces the value of `name`, or appends it.
void set_detail(Details& details, std::string_view name, Detail value);

}  // namespace agreed
