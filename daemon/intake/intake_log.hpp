#pragma once
// What the intake writes to the log. File names must come escaped (text.hpp).
#include <string>
#include <string_view>

namespace agreed {

void log_intake_info(std::string_view analyzer, const std::string& words);
void log_intake_warning(std::string_view analyzer, const std::string& words);

}  // namespace agreed
