#pragma once
// What permissions keep from a user, also where tests run as root, whom nothing is kept from.
#include <unistd.h>

namespace agreed::testing {

/// As long as it lives, the process has the rights of nobody if it is root's, else its own.
class AsNobody {
 public:
  AsNobody() {
    if (::getuid() == 0) changed_ = ::seteuid(kNobody) == 0;
  }
  ~AsNobody() {
    if (changed_) (void)!::seteuid(0);
  }
  AsNobody(const AsNobody&) = delete;
  AsNobody& operator=(const AsNobody&) = delete;

 private:
  static constexpr uid_t kNobody = 65'534;
  bool changed_ = false;
};

}  // namespace agreed::testing
