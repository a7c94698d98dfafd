#include "daemon/webhook/secrets.hpp"

#include <cstdlib>
#include <stdexcept>

#include <doctest/doctest.h>

#include "tests/support/temp_folder.hpp"

using namespace agreed;

namespace {

/// A file that is gone at the end of the test.
class SecretFile {
 public:
  explicit SecretFile(const std::string& content) { testing::write_file(path(), content); }
  [[nodiscard]] Route route() const {
    Route route;
    route.name = "shift";
    route.secret_file = path();
    return route;
  }

 private:
  [[nodiscard]] std::filesystem::path path() const { return folder_.path() / "secret"; }

  testing::TempFolder folder_;
};

std::string refusal(const Route& route) {
  try {
    (void)load_signing_keys(route);
  } catch (const std::runtime_error& error) {
    return error.what();
  }
  return "";
}

}  // namespace

TEST_CASE("a secret file holds one or two lines; white space and empty lines do not count") {
  CHECK(load_signing_keys(SecretFile("  one \r\n").route()).front().bytes == "one");
  const auto keys = load_signing_keys(SecretFile("\nwhsec_bmV3\n\n\told with space\n").route());
  REQUIRE(keys.size() == 2);
  CHECK(keys[0].bytes == "new");
  CHECK(keys[1].bytes == "old with space");
}

TEST_CASE("secrets from the environment are words") {
  ::setenv("AGREED_TEST_HOOK", " whsec_bmV3  old ", 1);
  Route route;
  route.name = "engineer";
  route.secret_env = "AGREED_TEST_HOOK";
  const auto keys = load_signing_keys(route);
  REQUIRE(keys.size() == 2);
  CHECK(keys[0].bytes == "new");
  CHECK(keys[1].bytes == "old");
  ::unsetenv("AGREED_TEST_HOOK");
  CHECK(refusal(route) == "route engineer: environment variable AGREED_TEST_HOOK is not set");
}

TEST_CASE("a secret that is missing, malformed or one too many is refused without being shown") {
  CHECK(refusal(SecretFile(" \n").route()).find("holds no secret") != std::string::npos);
  const auto many = refusal(SecretFile("hush1\nhush2\nhush3\n").route());
  CHECK(many.find("holds 3 secrets") != std::string::npos);
  CHECK(many.find("hush") == std::string::npos);
  const auto malformed = refusal(SecretFile("whsec_hush!\n").route());
  CHECK(malformed.find("not base64") != std::string::npos);
  CHECK(malformed.find("hush!") == std::string::npos);
  Route gone;
  gone.name = "shift";
  gone.secret_file = "/nonexistent/secret";
  CHECK(refusal(gone) == "route shift: secret file: there is no file /nonexistent/secret");
  Route directory;
  directory.secret_file = std::filesystem::temp_directory_path();
  CHECK_FALSE(refusal(directory).empty());
}

TEST_CASE("unsigned only when it says so") {
  Route route;
  route.name = "shift";
  CHECK(refusal(route).find("unsigned is not true") != std::string::npos);
  route.unsigned_ = true;
  CHECK(load_signing_keys(route).empty());
}
