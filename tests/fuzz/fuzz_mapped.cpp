// Mapped formats. The first byte chooses the format, the second the size of the blocks.
#include <array>
#include <cstdint>

#include "tests/fuzz/read_twice.hpp"

namespace {
using namespace agreed;
using Format = std::shared_ptr<const MappedFormat>;

MappedFormat wide() {
  MappedFormat format;
  format.id = "wide";
  format.delimiter = ';';
  format.decimal = ',';
  format.thousands = ".";
  format.time = {{"d", "t"}, "%d.%m.%Y %H:%M:%S", std::nullopt};
  format.item = "s";
  format.items = {{"L", "wheat-low"}};
  format.kind.check_pattern = "^L";
  format.values = {{"moisture", {"m", 0.1}}, {"protein", {"p", 1.8}}};
  format.notes = {"n"};
  format.no_value = {"-"};
  format.skip_rows = SkippedRows{"s", "^Mean"};
  return format;
}

MappedFormat in_long() {
  MappedFormat format;
  format.id = "long";
  format.thousands = " ";
  format.skip_lines = 1;
  format.time = {{"t"}, "%a %d-%b-%y %I:%M %p %z", "America/New_York"};
  format.item = "s";
  format.kind.column = "k";
  format.kind.words = {{"c", "check"}, {"s", "split"}, {"i", "intervention"}, {"v", "void"}};
  format.measurand = "w";
  format.measurands = {{"P", "protein"}};
  format.value = ResultColumn{"p", 1};
  format.factors = {{"protein", 10}};
  format.columns = {{"replicate", "r"}, {"operator", "o"}, {"standard", "e"}, {"note", "n"}};
  return format;
}

MappedFormat without_header() {
  MappedFormat format;
  format.id = "numbers";
  format.delimiter = '\t';
  format.header = false;
  format.time = {{"1"}, "", std::nullopt};
  format.item = "2";
  format.x = ResultColumn{"3", 1};
  format.y = ResultColumn{"4", 1};
  format.constants = {{"comparison", "protein"}};
  return format;
}

MappedFormat objects(ExportSyntax syntax) {
  MappedFormat format;
  format.id = "objects";
  format.syntax = syntax;
  format.decimal = ',';
  format.time = {{"t"}, "unix_milliseconds", std::nullopt};
  format.item = "s.id";
  format.kind.check_pattern = "^wheat";
  format.values = {{"protein", {"r.p", 0.1}}};
  return format;
}

MappedFormat encoded(MappedFormat format, const char* encoding) {
  format.encoding = encoding;
  return format;
}

const std::array<Format, 8>& formats() {
  const auto made = [](MappedFormat format) {
    return std::make_shared<const MappedFormat>(std::move(format));
  };
  static const std::array<Format, 8> all = {made(wide()),
                                            made(in_long()),
                                            made(without_header()),
                                            made(objects(ExportSyntax::json_lines)),
                                            made(objects(ExportSyntax::json_array)),
                                            made(encoded(wide(), "utf-16")),
                                            made(encoded(wide(), "utf-16be")),
                                            made(encoded(in_long(), "windows-1252"))};
  return all;
}

}  // namespace

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  if (size < 2) return 0;
  const std::string_view text(reinterpret_cast<const char*>(data + 2), size - 2);
  fuzz::read_twice(text, 1U + data[1], PlainSyntax::csv, formats().at(data[0] % formats().size()));
  return 0;
}
