#include "daemon/cli/token.hpp"

#include <fmt/format.h>

#include "daemon/cli/print_json.hpp"
#include "daemon/cli/with_configuration.hpp"
#include "daemon/exit_codes.hpp"
#include "daemon/http/new_token.hpp"

namespace agreed {
namespace {

void say_no_tokens_file(const std::filesystem::path& config) {
  fmt::print(stderr,
             "agreed: {} names no tokens file: set access.tokens_file, for example\n"
             "  access: {{tokens_file: tokens}}\n"
             "and reload (SIGHUP) or start the service; no token was made\n",
             config.string());
}

void say_token(const std::string& token, Role role, const std::string& name,
               const std::filesystem::path& file) {
  fmt::print(
      "token    {}\n"
      "         shown this once: only its hash is kept\n"
      "role     {}{}\n"
      "name     {}\n"
      "stored   {}\n"
      "A service that runs with this configuration takes it at once (Authorization: Bearer TOKEN).\n"
      "To end it, delete its line.\n",
      token, to_string(role), role == Role::operator_ ? " (may read and act)" : " (may read)", name,
      file.string());
}

int make_and_store(const TokenCommand& command, const std::filesystem::path& file) {
  const std::string token = make_token();
  std::string name;
  try {
    name = add_token(file, command.role, command.name, token);
  } catch (const TokenNameError& error) {
    fmt::print(stderr, "agreed: {}: {}; no token was made\n", file.string(), error.what());
    return kWrongUse;
  }
  if (command.json)
    print_json({{"token", token},
                {"role", to_string(command.role)},
                {"name", name},
                {"sha256", sha256_hex(token)},
                {"file", file.string()}});
  else
    say_token(token, command.role, name, file);
  return kDone;
}

}  // namespace

int token_command(const TokenCommand& command) {
  return with_configuration(command.config, command.json, [&](const Config& config) {
    if (config.tokens_file) return make_and_store(command, *config.tokens_file);
    say_no_tokens_file(command.config);
    return static_cast<int>(kWrongUse);
  });
}

}  // namespace agreed
