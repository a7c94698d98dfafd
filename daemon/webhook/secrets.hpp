#pragma once
// Where a route's signing secrets come from. They are read once, before the service starts; what() of an
// error names the file or the variable and never what is in it.
#include <vector>

#include "config/config.hpp"
#include "daemon/webhook/signature.hpp"

namespace agreed {

/// The keys of a route, the new one first: from `secret_file` (one or two lines) or `secret_env` (one or two
/// words), white space around them removed; none for `unsigned: true`. Throws std::runtime_error when a
/// secret is missing, unreadable or malformed, or there are more than two.
[[nodiscard]] std::vector<SigningKey> load_signing_keys(const Route& route);

}  // namespace agreed
