#include "daemon/thread_name.hpp"

#include <algorithm>
#include <array>

#include <pthread.h>

namespace agreed {

void name_this_thread(std::string_view name) noexcept {
  std::array<char, 16> ended{};
  std::copy_n(name.begin(), std::min(name.size(), ended.size() - 1), ended.begin());
  ::pthread_setname_np(::pthread_self(), ended.data());
}

}  // namespace agreed
