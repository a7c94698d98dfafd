// One file to its pieces.
#include "daemon/intake/file_reader.hpp"

#include <fstream>

#include <doctest/doctest.h>
#include <fcntl.h>

#include "core/base/rfc3339.hpp"
#include "daemon/intake/text.hpp"
#include "daemon/printable.hpp"
#include "tests/daemon/intake/watched_folder.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {

struct Reader {
  TempFolder temp;
  Settings settings = harrow_mill();
  ReadTask task{"a.csv", true, BadRowPolicy::keep_good, {}, {}};
  std::vector<FilePiece> pieces;

  ReadOutcome read(const std::function<void()>& meanwhile = {}, bool go_on = true) {
    const Descriptor folder(::open(temp.path().c_str(), O_RDONLY | O_DIRECTORY | O_CLOEXEC));
    const FileContent content(folder.get(), "a.csv");
    const PlainContext context{settings,
                               {0},
                               standards_of(settings, {0}),
                               std::make_shared<LocalZone>("UTC"),
                               {},
                               parse_rfc3339("2026-03-01T00:00:00Z").value().at};
    return read_file(content, task, context, [&](FilePiece&& piece) {
      pieces.push_back(std::move(piece));
      if (meanwhile) meanwhile();
      return go_on;
    });
  }
  void write(int rows) {
    std::string text = kCsvHeader;
    for (int i = 0; i < rows; ++i) text += csv_row("S-" + std::to_string(i));
    write_file(temp.path() / "a.csv", text);
  }
};

}  // namespace

TEST_CASE("a file is cut into pieces of at most 1,000 rows and the last one says so") {
  Reader reader;
  reader.write(2'500);
  CHECK(reader.read() == ReadOutcome::given);
  REQUIRE(reader.pieces.size() == 3);
  std::uint32_t line = 2;
  for (std::uint32_t i = 0; i < 3; ++i) {
    const FilePiece& piece = reader.pieces[i];
    CHECK(piece.piece == i);
    CHECK(piece.last == (i == 2));
    CHECK(piece.rows.size() == (i == 2 ? 500 : 1'000));
    CHECK(piece.file.sha256 == reader.pieces[0].file.sha256);
    CHECK(piece.file.sha256.size() == 64);
    for (const Row& row : piece.rows) REQUIRE(row.line == line++);
  }
}

TEST_CASE("exactly 1,000 rows are one piece") {
  Reader reader;
  reader.write(1'000);
  CHECK(reader.read() == ReadOutcome::given);
  CHECK(reader.pieces.size() == 1);
  CHECK(reader.pieces[0].last);
}

TEST_CASE("a file that grows while it is read is not finished") {
  Reader reader;
  reader.write(1'500);
  const auto grow = [&] { std::ofstream(reader.temp.path() / "a.csv", std::ios::app) << csv_row("late"); };
  CHECK(reader.read(grow) == ReadOutcome::changed);
  REQUIRE(reader.pieces.size() == 1);
  CHECK_FALSE(reader.pieces[0].last);
}

TEST_CASE("a file rewritten in place with the same size and mtime is not finished") {
  Reader reader;
  reader.write(1'500);
  const fs::path path = reader.temp.path() / "a.csv";
  const auto rewrite = [&] {
    const auto mtime = fs::last_write_time(path);
    std::fstream file(path, std::ios::in | std::ios::out);
    file.seekp(-3, std::ios::end);
    file << "6";
    file.close();
    fs::last_write_time(path, mtime);
  };
  CHECK(reader.read(rewrite) == ReadOutcome::changed);
  CHECK(reader.pieces.size() == 1);
}

TEST_CASE("reading ends when no more pieces are wanted") {
  Reader reader;
  reader.write(3500);
  CHECK(reader.read({}, false) == ReadOutcome::given_up);
  CHECK(reader.pieces.size() == 1);
}

TEST_CASE("texts of foreign bytes are shown clean") {
  CHECK(printable("a\nb\\\x1B[31m\xFF\xC3\xBC") == "a\\x0Ab\\x5C\\x1B[31m\\xFF\xC3\xBC");
  const std::string long_text = std::string(59, 'a') + "\xC3\xBC" + "bcd";
  CHECK(in_quotes(long_text) == '"' + std::string(59, 'a') + "...\"");
  CHECK(in_quotes("x") == "\"x\"");
}
