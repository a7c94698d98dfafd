// Files that are appended to: what one reading leaves, the next one takes, whatever was cut where.
#include "daemon/intake/growing_file.hpp"

#include <fstream>
#include <random>

#include <doctest/doctest.h>
#include <fcntl.h>

#include "tests/daemon/intake/read_mapped.hpp"
#include "tests/daemon/intake/read_plain.hpp"
#include "tests/daemon/intake/watched_folder.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {

const Instant kNow = at("2026-03-01T00:00:00Z");

/// An export, and what was read of it, portion by portion.
struct Export {
  TempFolder temp;
  Settings settings = harrow_mill();
  ReadLimits limits;
  std::vector<TakenPortion> taken;
  std::vector<FilePiece> pieces;
  std::unique_ptr<GrowingFile> file;
  std::shared_ptr<const MappedFormat> mapped;  ///< none: the plain format

  Export() { write_file(temp.path() / "a.csv", ""); }

  void append(std::string_view text) {
    std::ofstream(temp.path() / "a.csv", std::ios::app | std::ios::binary) << text;
  }
  [[nodiscard]] std::size_t rows() const {
    std::size_t count = 0;
    for (const FilePiece& piece : pieces) count += piece.rows.size();
    return count;
  }
  /// What the next looks at the file give.
  void read() {
    const Descriptor folder(::open(temp.path().c_str(), O_RDONLY | O_DIRECTORY | O_CLOEXEC));
    const FileContent content(folder.get(), "a.csv");
    if (!file || !file->begins_as_taken(content)) {
      file = std::make_unique<GrowingFile>(PlainContext{settings,
                                                        {0},
                                                        standards_of(settings, {0}),
                                                        std::make_shared<LocalZone>("Europe/Dublin"),
                                                        {},
                                                        kNow,
                                                        mapped},
                                           PlainSyntax::csv, limits);
      file->place(content, taken);
    }
    while (auto piece = file->read_on(content, "a.csv", kNow)) {
      taken.push_back({"a.csv", piece->file.size, piece->file.mtime_ns, piece->file.sha256});
      pieces.push_back(std::move(*piece));
    }
  }
  /// As after a restart: only what the journal holds is known.
  void forget() { file.reset(); }
};

std::string some_text(std::mt19937& random, int rows) {
  std::string text = kCsvHeader;
  for (int i = 0; i < rows; ++i) {
    switch (random() % 12) {
      case 0:
        text += "\n";
        break;
      case 1:
        text += "split,yesterday,protein,S-" + std::to_string(i) + ",11.5\r\n";
        break;
      case 2:
        text += kCsvHeader;
        break;
      case 3:
        text +=
            "item,kind,value,measurand,measured_at\nS,split,11.5,protein,2026-01-05T06:00:00Z\n" + kCsvHeader;
        break;
      case 4:
        text += std::string(1, '\0') + "garbage\xff\n";
        break;
      default:
        text += csv_row("S-" + std::to_string(i));
    }
  }
  return text;
}

}  // namespace

TEST_CASE(
    "appended in any pieces and with restarts between, a file gives the rows that it gives as a whole") {
  std::mt19937 random(20260105);
  for (int round = 0; round < 200; ++round) {
    CAPTURE(round);
    const std::string text = some_text(random, static_cast<int>(random() % 40));
    const ReadFile whole = read_plain(text);
    Export file;
    file.limits.piece_rows = 1 + random() % 7;
    for (std::size_t at = 0; at < text.size();) {
      const std::size_t more = 1 + random() % 200;
      file.append(std::string_view(text).substr(at, more));
      at += more;
      if (random() % 4 == 0) file.forget();
      if (random() % 3 != 0) file.read();
    }
    file.read();
    std::vector<Row> rows;
    std::vector<BadRow> bad;
    for (const FilePiece& piece : file.pieces) {
      CHECK(piece.growing);
      CHECK(piece.file.sha256 == sha256_hex(std::string_view(text).substr(0, piece.file.size)));
      rows.insert(rows.end(), piece.rows.begin(), piece.rows.end());
      bad.insert(bad.end(), piece.bad.begin(), piece.bad.end());
    }
    REQUIRE(rows.size() == whole.rows.size());
    for (std::size_t i = 0; i < rows.size(); ++i) {
      CHECK(rows[i].line == whole.rows[i].line);
      CHECK(rows[i].item == whole.rows[i].item);
      CHECK(rows[i].measured_at == whole.rows[i].measured_at);
      CHECK(rows[i].value == whole.rows[i].value);
    }
    REQUIRE(bad.size() == whole.bad_rows.size());
    for (std::size_t i = 0; i < bad.size(); ++i) CHECK(bad[i].line == whole.bad_rows[i].line);
  }
}

TEST_CASE("a line of two-byte characters counts once both bytes of its end have come, wherever it was cut") {
  for (const char* encoding : {"utf-16le", "utf-16be", "utf-16"}) {
    CAPTURE(encoding);
    const ConfigResult config = mill_with(std::string("    encoding: ") + encoding +
                                          "\n"
                                          "    time: {column: time}\n"
                                          "    item: {column: item}\n"
                                          "    notes: [remark]\n"
                                          "    values: {protein: result}\n");
    REQUIRE(config.config);
    const bool big = encoding == std::string("utf-16be");
    const auto wide = [&](std::u16string_view text) {
      std::string bytes;
      for (const char16_t c : text) {
        const char low = static_cast<char>(c & 0xff), high = static_cast<char>(c >> 8);
        bytes += {big ? high : low, big ? low : high};
      }
      return bytes;
    };
    // The remark has the bytes of a line end in it, and across two characters.
    const std::string header = wide(encoding == std::string("utf-16") ? u"\uFEFF"
                                                                        u"time,item,remark,result\r\n"
                                                                      : u"time,item,remark,result\r\n");
    const std::string row = wide(u"2026-01-05T06:00:00Z,S-1,\u010A\u0A41\u0100\u0A0A\u0100\u0A41,11.5\r\n");
    const std::string other = wide(u"2026-01-05T07:00:00Z,S-2,,11.6\r\n");
    for (std::size_t cut = 0; cut < row.size(); ++cut) {
      CAPTURE(cut);
      Export file;
      file.mapped = config.config->intake[0].mapped;
      file.append(header + row.substr(0, cut));
      file.read();
      CHECK(file.rows() == 0);
      if (cut % 3 == 0) file.forget();
      file.append(row.substr(cut));
      file.read();
      CHECK(file.rows() == 1);
      file.forget();
      file.append(other);
      file.read();
      CHECK(file.rows() == 2);
    }
  }
}

TEST_CASE("every prefix of an export gives its complete lines and no more") {
  const std::string text = csv("S-1") + csv_row("S-2") + "x\n" + csv_row("S-3");
  for (std::size_t size = 0; size <= text.size(); ++size) {
    Export file;
    file.append(std::string_view(text).substr(0, size));
    file.read();
    const std::size_t end = text.substr(0, size).rfind('\n');
    CHECK((file.taken.empty() ? 0 : file.taken.back().size) == (end == std::string::npos ? 0 : end + 1));
  }
}

TEST_CASE("a line longer than a block waits for its end and then counts") {
  Export file;
  file.append(csv("S-1") + "split,2026-01-05T06:00:00Z,protein," + std::string(300'000, ' '));
  file.read();
  CHECK(file.rows() == 1);
  file.append("S-2,11.5\n" + csv_row("S-3"));
  file.read();
  CHECK(file.rows() == 3);
}

TEST_CASE("a change far from both ends of a large export is found when it is placed anew") {
  Export file;
  std::string text = kCsvHeader;
  while (text.size() < 3'000'000) text += csv_row("S-1");
  file.append(text);
  file.read();
  const std::size_t taken = file.taken.back().size;
  CHECK(taken == text.size());
  text[1'500'000] = text[1'500'000] == '1' ? '2' : '1';
  write_file(file.temp.path() / "a.csv", text);
  file.forget();
  const std::size_t before = file.pieces.size();
  file.read();
  // Read on from the end of the last portion that is as it was.
  REQUIRE(file.pieces.size() > before);
  CHECK(file.pieces[before].file.size > 1'500'000);
  CHECK(file.pieces[before].file.size < 1'700'000);
}

TEST_CASE("an export without a usable header is told once, and read when it begins anew") {
  Export file;
  file.append("nothing\n");
  file.read();
  file.append("like it\n");
  file.read();
  REQUIRE(file.pieces.size() == 1);
  CHECK_FALSE(file.pieces[0].unusable.empty());
  write_file(file.temp.path() / "a.csv", csv("S-1"));
  file.read();
  CHECK(file.rows() == 1);
}

namespace {

struct GrowingFolder : WatchedFolder {
  fs::path path = inbox / "a.csv";
  GrowingFolder() { intake.mode = FileMode::growing; }
  void append(const std::string& text) const { std::ofstream(path, std::ios::app) << text; }
  [[nodiscard]] std::vector<std::string> items() const {
    std::vector<std::string> items;
    for (const FilePiece& piece : sink.pieces())
      for (const Row& row : piece.rows) items.push_back(row.item);
    return items;
  }
};

}  // namespace

TEST_CASE("a portion that was not committed is read again, and none behind it is taken before") {
  GrowingFolder folder;
  folder.limits.read.piece_rows = 10;
  std::string text = kCsvHeader;
  std::vector<std::string> expected;
  for (int i = 0; i < 5'000; ++i) {
    expected.push_back("S-" + std::to_string(i));
    text += csv_row(expected.back());
  }
  write_file(folder.path, text);
  folder.sink.fail_next(2);
  folder.start();
  CHECK(eventually([&] { return folder.sink.rows() == expected.size(); }));
  CHECK(folder.items() == expected);
  CHECK(eventually([&] { return folder.sink.state().pending == 0; }));
  CHECK(fs::exists(folder.path));
}

TEST_CASE("the unfinished last line of a renamed export is a bad row once, that of another waits") {
  GrowingFolder folder;
  folder.start_watching();
  folder.append(csv("S-1") + "split,2026-01");
  CHECK(eventually([&] { return folder.sink.rows() == 1; }));
  CHECK(folder.scans_pass(8));  // longer than an unfinished line is waited for
  CHECK(folder.sink.pieces().size() == 1);
  fs::rename(folder.path, folder.inbox / "b.csv");
  folder.append(csv("S-2"));
  CHECK(eventually([&] { return folder.sink.pieces().size() == 3; }));
  CHECK(folder.scans_pass(8));
  std::size_t bad = 0;
  for (const FilePiece& piece : folder.sink.pieces()) {
    bad += piece.bad.size();
    for (const BadRow& row : piece.bad) {
      CHECK(piece.file.name == "b.csv");
      CHECK(row.line == 3);
      CHECK(row.text == "split,2026-01");
    }
  }
  CHECK(bad == 1);
}

TEST_CASE("links and pipes in a folder of growing files are passed over") {
  GrowingFolder folder;
  write_file(folder.temp.path() / "secret", csv("S-9"));
  fs::create_symlink(folder.temp.path() / "secret", folder.inbox / "link.csv");
  folder.start_watching();
  folder.append(csv("S-1"));
  CHECK(eventually([&] { return folder.sink.rows() == 1; }));
  CHECK(folder.scans_pass());
  CHECK(folder.items() == std::vector<std::string>{"S-1"});
  CHECK(fs::is_symlink(folder.inbox / "link.csv"));
}
