#pragma once
// The style sheet and the script of the page, built into the program from page.css and page.js.
#include <string_view>

namespace agreed {

[[nodiscard]] std::string_view page_style_sheet();
[[nodiscard]] std::string_view page_script();

}  // namespace agreed
