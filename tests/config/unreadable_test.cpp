// A file that is kept from us is not told as missing, and where the way to it ends is told.
#include "config/unreadable.hpp"

#include <filesystem>
#include <string>

#include <doctest/doctest.h>
#include <sys/stat.h>

#include "config/config.hpp"
#include "tests/support/as_nobody.hpp"
#include "tests/support/temp_folder.hpp"

using namespace agreed;
namespace fs = std::filesystem;

namespace {

/// A folder that anybody may search, with one that nobody may, and a file in each.
class Site {
 public:
  Site() {
    fs::permissions(folder_.path(), fs::perms(0755));
    fs::create_directory(locked());
    testing::write_file(locked() / "secret", "whsec_SGFycm93TWlsbEhhcnJvd01pbGw\n");
    testing::write_file(folder_.path() / "open", "whsec_SGFycm93TWlsbEhhcnJvd01pbGw\n");
    testing::write_file(closed(), "whsec_SGFycm93TWlsbEhhcnJvd01pbGw\n");
    fs::permissions(closed(), fs::perms::none);
    fs::permissions(locked(), fs::perms::none);
  }
  ~Site() { fs::permissions(locked(), fs::perms::owner_all); }
  Site(const Site&) = delete;
  Site& operator=(const Site&) = delete;

  [[nodiscard]] fs::path path() const { return folder_.path(); }
  [[nodiscard]] fs::path locked() const { return path() / "locked"; }
  [[nodiscard]] fs::path closed() const { return path() / "closed"; }

 private:
  testing::TempFolder folder_;
};

std::string told(const std::string& route, const fs::path& file) {
  const ConfigResult result = parse_config(
      "site: Harrow Mill\n"
      "analyzers: {line1: {inbox: drop/line1}}\n"
      "measurands: {protein: {unit: g/100 g}}\n"
      "alerts: {routes: [{name: shift, url: \"https://chat.harrow.example/hooks/a1\", " +
          route + "}]}\n",
      file);
  std::string text;
  for (const ConfigProblem& problem : result.problems) text += to_string(problem, "agreed.yaml") + '\n';
  return text;
}

bool contains(const std::string& text, const std::string& part) {
  return text.find(part) != std::string::npos;
}

}  // namespace

TEST_CASE("what can be read is not complained of; what is missing or no file is said to be so") {
  const Site site;
  CHECK(why_unreadable(site.path() / "open").empty());
  CHECK(why_unreadable(site.path() / "gone") == "there is no file " + (site.path() / "gone").string());
  CHECK(why_unreadable(site.path() / "open" / "gone") ==
        "there is no file " + (site.path() / "open" / "gone").string());
  CHECK(why_unreadable(site.path()) == site.path().string() + " is not a file");
  const fs::path pipe = site.path() / "pipe";
  REQUIRE(::mkfifo(pipe.c_str(), 0600) == 0);
  CHECK(why_unreadable(pipe) == pipe.string() + " is not a file");
}

TEST_CASE("permission denied is told with the user and the first folder that may not be searched") {
  const Site site;
  const testing::AsNobody nobody;
  const std::string on_the_way = why_unreadable(site.locked() / "deeper" / "secret");
  CHECK(contains(on_the_way, "permission denied: user "));
  CHECK(contains(on_the_way, " may not search the folder " + site.locked().string() + " on the way to " +
                                 (site.locked() / "deeper" / "secret").string()));
  const std::string itself = why_unreadable(site.closed());
  CHECK(contains(itself, "permission denied: user "));
  CHECK(contains(itself, " may not read " + site.closed().string()));
}

TEST_CASE("a configuration says so of secrets, certificates and itself") {
  const Site site;
  const testing::AsNobody nobody;
  const fs::path file = site.path() / "agreed.yaml";
  const std::string search = " may not search the folder " + site.locked().string();
  const std::string secret = told("secret_file: locked/secret", file);
  CHECK(contains(secret, "agreed.yaml:4:"));
  CHECK(contains(secret, "alerts.routes[0].secret_file: permission denied: user "));
  CHECK(contains(secret, search));
  CHECK_FALSE(contains(secret, "no file"));
  CHECK(contains(told("secret_file: closed", file), " may not read " + site.closed().string()));
  const std::string certificates = told("unsigned: true, ca_file: locked/ca.pem", file);
  CHECK(contains(certificates, "alerts.routes[0].ca_file: permission denied: user "));
  CHECK(contains(certificates, search));
  for (const fs::path& config : {site.locked() / "agreed.yaml", site.closed()}) {
    const ConfigResult result = read_config(config);
    REQUIRE(result.problems.size() == 1);
    CHECK(contains(result.problems[0].message, "permission denied: user "));
  }
}
