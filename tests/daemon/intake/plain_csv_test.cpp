// The CSV syntax of the plain format.
#include <random>

#include <doctest/doctest.h>

#include "tests/daemon/intake/read_plain.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {

const std::string kHeader = "kind,measured_at,measurand,item,value,note\n";

std::string row(const std::string& item, const std::string& note = "") {
  return "split,2026-01-05T06:00:00Z,protein," + item + ",11.5," + note + "\n";
}
bool has(const std::string& text, const char* words) {
  INFO(text);
  return text.find(words) != std::string::npos;
}
std::vector<std::uint32_t> bad_lines(const ReadFile& file) {
  std::vector<std::uint32_t> lines;
  for (const BadRow& bad : file.bad_rows) lines.push_back(bad.line);
  return lines;
}
std::vector<std::uint32_t> good_lines(const ReadFile& file) {
  std::vector<std::uint32_t> lines;
  for (const Row& good : file.rows) lines.push_back(good.line);
  return lines;
}
using Lines = std::vector<std::uint32_t>;

}  // namespace

TEST_CASE("byte order mark, CRLF, blank lines, quotes and column order make no difference") {
  const ReadFile file = read_plain(
      "\xEF\xBB\xBFvalue,item,\"measurand\",measured_at,kind\r\n"
      "11.5,\"S \"\"1\"\", left\",protein,2026-01-05T06:00:00Z,split\r\n\r\n"
      " 11.5 , S-2 ,protein,2026-01-05T06:00:00Z,split\r\n");
  CHECK(file.unusable == "");
  CHECK(file.bad_rows.empty());
  REQUIRE(file.rows.size() == 2);
  CHECK(file.rows[0].item == "S \"1\", left");
  CHECK(file.rows[1].item == "S-2");
  CHECK(file.rows[1].line == 4);
}

TEST_CASE("a last line without line end counts only if the file was closed") {
  std::string text = kHeader + row("S-1") + row("S-2");
  text.pop_back();
  CHECK(read_plain(text, {.closed = true}).rows.size() == 2);
  const ReadFile open = read_plain(text, {.closed = false});
  CHECK(open.rows.size() == 1);
  REQUIRE(open.bad_rows.size() == 1);
  CHECK(open.bad_rows[0].line == 3);
  CHECK(has(open.bad_rows[0].reason, "no line end"));
}

TEST_CASE("a file without the needed columns is unusable and says which one is missing") {
  CHECK(has(read_plain("kind,measured_at,measurand,item\n").unusable, "no column \"value\""));
  CHECK(has(read_plain("kind,mesured_at,measurand,item,value\n").unusable, "did you mean \"mesured_at\"?"));
  CHECK(has(read_plain("kind;measured_at;measurand;item;value\n").unusable, "separated by ';'"));
  CHECK(
      has(read_plain("kind,measured_at,measurand,item,value,item\n").unusable, "repeats the name \"item\""));
  CHECK(has(read_plain("kind,measured_at,measurand,item,value,a,a\n").unusable, "repeats the name \"a\""));
  CHECK(has(read_plain("kind,measured_at,measurand,item,value,\n").unusable, "has no name"));
  CHECK(read_plain("kind,measured_at,measurand,item,x,y,comparison\n").unusable == "");
}

TEST_CASE("an empty file, binary garbage and UTF-16 are unusable") {
  CHECK(has(read_plain("").unusable, "empty"));
  CHECK(has(read_plain("\n\n\r\n").unusable, "empty"));
  CHECK(has(read_plain(std::string("\x7F"
                                   "ELF\x02\x01\0\0\0\n",
                                   10))
                .unusable,
            "not text"));
  CHECK(has(read_plain(std::string("\xFF\xFEk\0i\0", 6)).unusable, "UTF-16"));
  CHECK(has(read_plain(std::string(3U << 20U, 'a')).unusable, "not text"));
  CHECK(has(read_plain("\"kind,measured_at\n").unusable, "no header row"));
}

TEST_CASE("a file of header alone has nothing in it and nothing wrong with it") {
  const ReadFile file = read_plain(kHeader);
  CHECK(file.unusable == "");
  CHECK(file.rows.empty());
  CHECK(file.bad_rows.empty());
}

TEST_CASE("ten thousand columns are refused, a thousand are read") {
  std::string header = "kind,measured_at,measurand,item,value",
              values = "split,2026-01-05T06:00:00Z,protein,S-1,11";
  for (int i = 5; i < 1000; ++i) header += ",c" + std::to_string(i), values += ",v";
  CHECK(read_plain(header + "\n" + values + "\n").rows.size() == 1);
  for (int i = 1000; i < 10'000; ++i) header += ",c" + std::to_string(i);
  CHECK(has(read_plain(header + "\n").unusable, "10000 columns"));
}

TEST_CASE("a row with too many or too few fields is a bad row") {
  const ReadFile file = read_plain(kHeader + row("S-1") + "split,2026-01-05T06:00:00Z,protein\n" +
                                   row("S-2", "a,b") + row("S-3"));
  CHECK(bad_lines(file) == Lines{3, 4});
  CHECK(good_lines(file) == Lines{2, 5});
  CHECK(has(file.bad_rows[0].reason, "has 3 fields; the header has 6"));
}

TEST_CASE("NUL bytes make a bad row and harm no other") {
  const ReadFile file =
      read_plain(kHeader + row("S-1") + row(std::string("S\0", 2)) + std::string("\0\0\0\n", 4) + row("S-2"));
  CHECK(bad_lines(file) == Lines{3, 4});
  CHECK(good_lines(file) == Lines{2, 5});
}

TEST_CASE("a line beyond 1 MiB is a bad row and harms no other") {
  const ReadFile file =
      read_plain(kHeader + row("S-1") + row("S-2", std::string(3U << 20U, 'x')) + row("S-3"));
  CHECK(bad_lines(file) == Lines{3});
  CHECK(good_lines(file) == Lines{2, 4});
  CHECK(file.bad_rows[0].text.size() == 500);
}

TEST_CASE("a quote that is never closed costs its own line and no other") {
  for (const char* stray : {"\"left open", "a\"b", "\"a\"b"}) {
    CAPTURE(stray);
    const ReadFile file = read_plain(kHeader + row("S-1") + row("S-2", stray) + row("S-3", "\"closed\"") +
                                     row("S-4") + row("S-5"));
    CHECK(bad_lines(file) == Lines{3});
    CHECK(good_lines(file) == Lines{2, 4, 5, 6});
  }
}

TEST_CASE("an open quote before two megabytes of rows costs its own line and no other") {
  std::string text = kHeader + row("S-1", "\"left open");
  int rows = 0;
  for (; text.size() < (2U << 20U); ++rows) text += row("S-" + std::to_string(rows));
  const ReadFile file = read_plain(text);
  CHECK(bad_lines(file) == Lines{2});
  CHECK(static_cast<int>(file.rows.size()) == rows);
}

TEST_CASE("a quoted field over two lines is one bad row") {
  const ReadFile file = read_plain(kHeader + row("S-1", "\"two\r\nlines\"") + row("S-2"));
  CHECK(bad_lines(file) == Lines{2});
  CHECK(has(file.bad_rows[0].reason, "control characters"));
  CHECK(good_lines(file) == Lines{4});
}

TEST_CASE("the cut into blocks makes no difference") {
  const std::string text =
      kHeader + row("S-1") + row("S-2", "\"open") + row("S-3", "\"x\"") + "bad\r\n" + row("S-4");
  const ReadFile whole = read_plain(text);
  for (const std::size_t block : {1U, 2U, 3U, 7U, 64U}) {
    const ReadFile cut = read_plain(text, {.block = block});
    CHECK(bad_lines(cut) == bad_lines(whole));
    CHECK(good_lines(cut) == good_lines(whole));
  }
}

TEST_CASE("every prefix of a valid file is read without harm") {
  const std::string text =
      "\xEF\xBB\xBF" + kHeader + row("S-1", "\"a, \"\"b\"\"\"") + row("M\xC3\xBC") + row("S-3");
  for (std::size_t size = 0; size <= text.size(); ++size)
    for (const bool closed : {false, true}) {
      const ReadFile file = read_plain(std::string_view(text).substr(0, size), {.closed = closed});
      const auto whole_lines =
          std::count(text.begin(), text.begin() + static_cast<std::ptrdiff_t>(size), '\n');
      if (whole_lines == 0) continue;
      CHECK(file.unusable == "");
      CHECK(file.rows.size() >= static_cast<std::size_t>(whole_lines - 1));
      CHECK(file.rows.size() + file.bad_rows.size() <= static_cast<std::size_t>(whole_lines));
    }
}

TEST_CASE("random garbage is read without harm, each line once") {
  constexpr unsigned kSeed = 20260105;
  INFO("seed ", kSeed);
  std::mt19937 random(kSeed);
  const std::string alphabet = "\",\n\r \ta1<\xC3\xBC;{}[]:\\";
  for (int round = 0; round < 2000; ++round) {
    std::string text = kHeader;
    for (auto i = random() % 120; i > 0; --i) text += alphabet[random() % alphabet.size()];
    const std::size_t block = 1 + random() % 40;
    const ReadFile file = read_plain(text, {.block = block});
    CHECK(file.rows.empty());
    const Lines lines = bad_lines(file);
    CHECK(std::is_sorted(lines.begin(), lines.end()));
    CHECK(std::adjacent_find(lines.begin(), lines.end()) == lines.end());
    for (const PlainSyntax syntax : {PlainSyntax::csv, PlainSyntax::json_lines, PlainSyntax::json_array})
      (void)read_plain(std::string_view(text).substr(kHeader.size()), {.syntax = syntax, .block = block});
  }
}
