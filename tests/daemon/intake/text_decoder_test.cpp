// Character sets, alone and through a whole export.
#include "daemon/intake/text_decoder.hpp"

#include <stdexcept>

#include <doctest/doctest.h>

#include "tests/daemon/intake/read_mapped.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {

std::string decoded(const std::string& encoding, const std::string& bytes, std::size_t block = 1) {
  TextDecoder decoder(encoding);
  std::string text;
  for (std::size_t at = 0; at < bytes.size(); at += block) text += decoder.decode(bytes.substr(at, block));
  return text += decoder.finish();
}

std::string utf_16(const std::string& ascii, bool big) {
  std::string bytes;
  for (const char c : ascii) bytes += big ? std::string{'\0', c} : std::string{c, '\0'};
  return bytes;
}

std::string own(const std::string& encoding) {
  return "    encoding: " + encoding +
         "\n    time: {column: t}\n    item: {column: s}\n    values: {protein: \"W\xC3\xA4rme\"}\n";
}

}  // namespace

TEST_CASE("single-byte and two-byte character sets become UTF-8, cut anywhere") {
  CHECK(decoded("windows-1252",
                "M\xFC"
                "hle \x80\x96") == "M\xC3\xBChle \xE2\x82\xAC\xE2\x80\x93");
  CHECK(decoded("windows-1250", "\x9A") == "\xC5\xA1");
  CHECK(decoded("windows-1251", "\xCF") == "\xD0\x9F");
  CHECK(decoded("iso-8859-1", "\xE9") == "\xC3\xA9");
  CHECK(decoded("iso-8859-15", "\xA4") == "\xE2\x82\xAC");
  const std::string wheel = {'\x3D', '\xD8', '\x00', '\xDE', 'a', '\0'};  // U+1F600 as a surrogate pair
  for (const std::size_t block : {1U, 2U, 3U, 6U})
    CHECK(decoded("utf-16le", wheel, block) ==
          "\xF0\x9F\x98\x80"
          "a");
  CHECK_THROWS_AS(TextDecoder("morse"), std::runtime_error);
}

TEST_CASE("what cannot be read becomes no UTF-8, and only that") {
  CHECK(decoded("windows-1252",
                "a\x81"
                "b") ==
        "a\xFF"
        "b");
  const std::string half = {'\x00', '\xDE', 'a', '\0'};
  CHECK(decoded("utf-16le", half, 4) ==
        "\xFF"
        "a");
  CHECK(decoded("utf-16le", std::string("a\0b", 3)) == "a\xFF");
}

TEST_CASE("an export in each encoding is read alike") {
  const std::string umlaut = "W\xC3\xA4rme", row = "\n2026-01-05T06:00:00Z,S-1,10.6\n";
  const auto check_reads = [](const std::string& encoding, const std::string& bytes) {
    CAPTURE(encoding);
    for (const std::size_t block : {1U, 5U, 65'536U}) {
      const ReadFile file = read_mapped(own(encoding), bytes, block);
      CHECK(file.unusable == "");
      CHECK(file.bad_rows.empty());
      REQUIRE(file.rows.size() == 1);
      CHECK(file.rows[0].value == 10.6);
      CHECK(file.rows[0].line == 2);
    }
  };
  check_reads("utf-8", "t,s," + umlaut + row);
  check_reads("utf-8", "\xEF\xBB\xBFt,s," + umlaut + row);
  check_reads("windows-1252", "t,s,W\xE4rme" + row);
  const std::string little = utf_16("t,s,W", false) + std::string{'\xE4', '\0'} + utf_16("rme" + row, false);
  const std::string big = utf_16("t,s,W", true) + std::string{'\0', '\xE4'} + utf_16("rme" + row, true);
  check_reads("utf-16le", little);
  check_reads("utf-16be", big);
  check_reads("utf-16", "\xFF\xFE" + little);
  check_reads("utf-16", "\xFE\xFF" + big);
  check_reads("utf-16le", "\xFF\xFE" + little);
  CHECK(read_mapped(own("utf-16"), little).unusable.find("byte order mark") != std::string::npos);
  CHECK(read_mapped(own("utf-8"), "\xFF\xFE" + little).unusable.find("UTF-16") != std::string::npos);
}

TEST_CASE("a byte that the character set does not have costs the row that needs it") {
  const ReadFile file = read_mapped(
      own("windows-1252"), "t,s,W\xE4rme\n2026-01-05T06:00:00Z,S\x81,10.6\n2026-01-05T06:00:00Z,S-2,10\n");
  REQUIRE(file.rows.size() == 1);
  REQUIRE(file.bad_rows.size() == 1);
  CHECK(file.bad_rows[0].reason == "s: \"S\\xFF\" is not UTF-8 text without control characters");
}
