#pragma once
// The version of this build; its one place is CMakeLists.txt.

namespace agreed {

[[nodiscard]] const char* version();

}  // namespace agreed
