#pragma once
// Who may ask: bearer tokens (RFC 6750) and the address we listen on.
#include <optional>
#include <string>

#include "config/config.hpp"
#include "daemon/http/message.hpp"
#include "daemon/http/tokens.hpp"

namespace agreed {

/// Whether reading needs a token: on an address others can reach, by themselves or through a proxy, unless it
/// was opened on purpose.
[[nodiscard]] bool reads_need_token(const Listen& listen);

/// Throws std::runtime_error, saying what to do, when `listen` would be reachable by others with nothing to
/// tell readers by: no token (with what is wrong with their file, if anything) and not open_to_network.
void require_reader_token(const Listen& listen, Tokens& tokens);

/// Nothing when the request's token has the role; else the answer that refuses it: 401, or 403 for a known
/// token of too small a role. An operator may also read.
[[nodiscard]] std::optional<HttpAnswer> refused(const HttpRequest& request, Role needed, Tokens& tokens);

}  // namespace agreed
