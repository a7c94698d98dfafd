#include "daemon/version.hpp"

namespace agreed {

const char* version() {
  return AGREED_VERSION;
}

}  // namespace agreed
