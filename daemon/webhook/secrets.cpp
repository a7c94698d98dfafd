#include "daemon/webhook/secrets.hpp"

#include <cstdlib>
#include <fstream>
#include <sstream>
#include <stdexcept>

#include "config/unreadable.hpp"
#include "core/base/ascii.hpp"

namespace agreed {
namespace {

constexpr const char* kWhiteSpace = " \t\r\n\v\f";

std::vector<std::string> lines_of(const std::filesystem::path& file) {
  if (const std::string why = why_unreadable(file); !why.empty())
    throw std::runtime_error("secret file: " + why);
  std::ifstream in(file);
  std::vector<std::string> secrets;
  for (std::string line; std::getline(in, line);)
    if (const auto secret = ascii::trimmed(line, kWhiteSpace); !secret.empty()) secrets.emplace_back(secret);
  if (!in.is_open() || in.bad()) throw std::runtime_error("secret file " + file.string() + " cannot be read");
  return secrets;
}

std::vector<std::string> words_of(const std::string& variable) {
  const char* value = std::getenv(variable.c_str());  // NOLINT(concurrency-mt-unsafe): nobody here sets any
  if (value == nullptr) throw std::runtime_error("environment variable " + variable + " is not set");
  std::istringstream in(value);
  std::vector<std::string> secrets;
  for (std::string word; in >> word;) secrets.push_back(word);
  return secrets;
}

/// Secrets and the words for the place they come from.
struct Found {
  std::string place;
  std::vector<std::string> secrets;
};

Found look_up(const Route& route) {
  if (route.secret_file) return {"secret file " + route.secret_file->string(), lines_of(*route.secret_file)};
  if (route.secret_env) return {"environment variable " + *route.secret_env, words_of(*route.secret_env)};
  throw std::runtime_error("it has neither secret_file nor secret_env, and unsigned is not true");
}

std::vector<SigningKey> keys_of(const Found& found) {
  if (found.secrets.empty()) throw std::runtime_error(found.place + " holds no secret");
  if (found.secrets.size() > 2)
    throw std::runtime_error(found.place + " holds " + std::to_string(found.secrets.size()) +
                             " secrets; at most two (new, old) were expected");
  std::vector<SigningKey> keys;
  try {
    for (const auto& secret : found.secrets) keys.push_back(signing_key(secret));
  } catch (const std::invalid_argument& error) {
    throw std::runtime_error(found.place + ": " + error.what());
  }
  return keys;
}

}  // namespace

std::vector<SigningKey> load_signing_keys(const Route& route) {
  if (route.unsigned_ && !route.secret_file && !route.secret_env) return {};
  try {
    return keys_of(look_up(route));
  } catch (const std::runtime_error& error) {
    throw std::runtime_error("route " + route.name + ": " + error.what());
  }
}

}  // namespace agreed
