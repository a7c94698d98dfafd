// A new token: its line is added to what is there, lasts, and is taken by a running service.
#include "daemon/http/new_token.hpp"

#include <set>
#include <system_error>
#include <thread>

#include <doctest/doctest.h>

#include "tests/support/temp_folder.hpp"

using namespace agreed;
using namespace agreed::testing;

TEST_CASE("tokens are long, clean and never the same") {
  std::set<std::string> seen;
  for (int i = 0; i < 1000; ++i) {
    const std::string token = make_token();
    CHECK(token.size() == 7 + 48);
    CHECK(token.rfind("agreed_", 0) == 0);
    CHECK(token.find_first_not_of("0123456789abcdef", 7) == std::string::npos);
    seen.insert(token);
  }
  CHECK(seen.size() == 1000);
}

TEST_CASE("names are read from lines, comments left out, broken lines not") {
  CHECK(token_names("# reader wall x\n\nreader wall aa\n  operator  shift\tbb\nreder typo\nreader\n#x y")
            .size() == 3);
  CHECK(token_names("reader wall aa\noperator shift bb") == std::vector<std::string>{"wall", "shift"});
  CHECK(token_names("").empty());
}

TEST_CASE("a name is as wanted, or made of the role and the first free number") {
  CHECK(token_name("K.Byrne", Role::reader, {}) == "K.Byrne");
  CHECK(token_name("Zoë", Role::reader, {"wall"}) == "Zoë");
  CHECK(token_name("", Role::operator_, {}) == "operator");
  CHECK(token_name("", Role::operator_, {"operator", "operator-3"}) == "operator-2");
  CHECK(token_name("", Role::reader, {"reader", "reader-2"}) == "reader-3");
  CHECK_THROWS_WITH_AS(token_name("wall", Role::reader, {"wall"}),
                       doctest::Contains("there is a token named wall already"), TokenNameError);
  for (const std::string& wrong : {std::string("a b"), std::string("#a"), std::string("a\nb"),
                                   std::string("\xff"), std::string(65, 'a'), std::string("a\x7f")})
    CHECK_THROWS_AS(token_name(wrong, Role::reader, {}), TokenNameError);
}

TEST_CASE("the file is made for its owner alone, and its token is known") {
  const TempFolder folder;
  const auto file = folder.path() / "tokens";
  Tokens tokens(file, [](const std::string&) {});
  CHECK_FALSE(tokens.role_of("secret").has_value());
  CHECK(add_token(file, Role::operator_, "shift", "secret") == "shift");
  CHECK(std::filesystem::status(file).permissions() ==
        (std::filesystem::perms::owner_read | std::filesystem::perms::owner_write));
  CHECK(read_whole(file) == "operator shift " + sha256_hex("secret") + "\n");
  CHECK(tokens.role_of("secret") == Role::operator_);
  add_token(file, Role::reader, "", "other");
  CHECK(tokens.role_of("other") == Role::reader);
  CHECK(tokens.role_of("secret") == Role::operator_);
}

TEST_CASE("what is in the file stays, byte for byte, also when its last line has no end") {
  const TempFolder folder;
  const auto file = folder.path() / "tokens";
  const std::string before = "# ours\r\nreader wall zz\n\nnonsense \xff\noperator x " + sha256_hex("x");
  write_file(file, before);
  add_token(file, Role::reader, "", "new");
  CHECK(read_whole(file) == before + "\nreader reader " + sha256_hex("new") + "\n");
  CHECK_THROWS_AS(add_token(file, Role::reader, "wall", "newer"), TokenNameError);
  CHECK(read_whole(file) == before + "\nreader reader " + sha256_hex("new") + "\n");
}

TEST_CASE("what cannot be written is told and makes nothing") {
  const TempFolder folder;
  CHECK_THROWS_WITH_AS(add_token(folder.path() / "none" / "tokens", Role::reader, "", "t"),
                       doctest::Contains("none/tokens"), std::system_error);
  CHECK_THROWS_AS(add_token(folder.path(), Role::reader, "", "t"), std::system_error);
  CHECK_THROWS_AS(add_token(folder.path() / "tokens", Role::reader, "a b", "t"), TokenNameError);
  CHECK_FALSE(std::filesystem::exists(folder.path() / "tokens"));
}

TEST_CASE("many at once lose nothing and give every name once") {
  const TempFolder folder;
  const auto file = folder.path() / "tokens";
  std::vector<std::thread> makers;
  makers.reserve(8);
  for (int maker = 0; maker < 8; ++maker)
    makers.emplace_back([&file, maker] {
      for (int i = 0; i < 5; ++i)
        add_token(file, Role::reader, "", std::to_string(maker) + "/" + std::to_string(i));
    });
  for (std::thread& maker : makers) maker.join();
  const auto names = token_names(read_whole(file));
  CHECK(names.size() == 40);
  CHECK(std::set<std::string>(names.begin(), names.end()).size() == 40);
  Tokens tokens(file, [](const std::string& trouble) { FAIL_CHECK(trouble); });
  for (int maker = 0; maker < 8; ++maker) CHECK(tokens.role_of(std::to_string(maker) + "/4") == Role::reader);
}
