#pragma once
// A new bearer token, and its line in the tokens file that `Tokens` reads.
#include <filesystem>
#include <stdexcept>
#include <string>
#include <string_view>
#include <vector>

#include "daemon/http/tokens.hpp"

namespace agreed {

/// A name that a tokens file has already, or that cannot stand in one; what() is for people.
class TokenNameError : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

/// "reader" or "operator", as the tokens file has it.
[[nodiscard]] const char* to_string(Role role);

/// "agreed_" and 48 hexadecimal digits (192 bits) from the operating system's random source; throws
/// std::runtime_error if it gives none.
[[nodiscard]] std::string make_token();

/// The names in the text of a tokens file, also of lines that cannot be used.
[[nodiscard]] std::vector<std::string> token_names(std::string_view text);

/// `wanted`, or for an empty one the role's name and, if that is taken, its first free number: operator,
/// operator-2, operator-3. Throws TokenNameError if `wanted` is in `taken`, or is not 1 to 64 bytes of UTF-8
/// without white space and control characters that do not begin with #.
[[nodiscard]] std::string token_name(const std::string& wanted, Role role,
                                     const std::vector<std::string>& taken);

/// Adds the line `role name sha256` of the token and returns the name, made as above. The file is created for
/// its owner alone (0600); its folder must be there. Lines in it are kept, byte for byte, and when this
/// returns the new one is on the disk; when it throws, its lines are as they were. Two at once wait
/// for each other. Throws TokenNameError, and std::system_error or std::runtime_error when the file cannot be
/// written.
std::string add_token(const std::filesystem::path& file, Role role, const std::string& wanted,
                      std::string_view token);

}  // namespace agreed
