#pragma once

#include <string_view>

namespace agreed {

/// Names the calling thread for whoever looks with `top -H` or `ps -L`. Linux shows the first 15 bytes.
void name_this_thread(std::string_view name) noexcept;

}  // namespace agreed
