#include "daemon/intake/plain_reader.hpp"

#include "daemon/intake/csv_rows.hpp"
#include "daemon/intake/json_rows.hpp"
#include "daemon/intake/text.hpp"

namespace agreed {
namespace {

std::unique_ptr<RowFormat> make_format(PlainSyntax syntax, const RowMaker& maker, RowTaker& taker) {
  if (syntax == PlainSyntax::json_lines) return make_json_line_rows(maker, taker);
  if (syntax == PlainSyntax::json_array) return make_json_array_rows(maker, taker);
  return make_csv_rows(maker, taker);
}

}  // namespace

PlainSyntax plain_syntax_of(std::string_view file_name) {
  if (ends_with_word(file_name, ".jsonl")) return PlainSyntax::json_lines;
  if (ends_with_word(file_name, ".json")) return PlainSyntax::json_array;
  return PlainSyntax::csv;
}

PlainReader::PlainReader(PlainContext context, PlainSyntax syntax, RowTaker& taker)
    : maker_(std::move(context)), format_(make_format(syntax, maker_, taker)) {}

bool PlainReader::feed(std::string_view block) {
  format_->feed(block);
  return unusable().empty();
}

void PlainReader::pause() {
  if (unusable().empty()) format_->pause();
}

void PlainReader::finish(bool closed) {
  format_->finish(closed);
}

}  // namespace agreed
