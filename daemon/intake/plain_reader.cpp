#include "daemon/intake/plain_reader.hpp"

#include "daemon/intake/csv_rows.hpp"
#include "daemon/intake/json_rows.hpp"
#include "daemon/intake/mapped_rows.hpp"
#include "daemon/intake/text.hpp"

namespace agreed {
namespace {

std::unique_ptr<RowFormat> make_format(PlainSyntax syntax, const RowMaker& maker, RowTaker& taker) {
  if (syntax == PlainSyntax::json_lines) return make_json_line_rows(maker, taker);
  if (syntax == PlainSyntax::json_array) return make_json_array_rows(maker, taker);
  return make_csv_rows(maker, taker);
}

/// Of a format that names a zone of its own.
PlainContext in_own_zone(PlainContext context) {
  if (context.mapped && context.mapped->time.zone)
    context.zone = std::make_shared<const LocalZone>(*context.mapped->time.zone);
  return context;
}

}  // namespace

PlainSyntax plain_syntax_of(std::string_view file_name) {
  if (ends_with_word(file_name, ".jsonl")) return PlainSyntax::json_lines;
  if (ends_with_word(file_name, ".json")) return PlainSyntax::json_array;
  return PlainSyntax::csv;
}

PlainReader::PlainReader(PlainContext context, PlainSyntax syntax, RowTaker& taker)
    : context_(in_own_zone(std::move(context))),
      maker_(context_),
      format_(context_.mapped ? make_mapped_rows(*context_.mapped, context_, maker_, taker)
                              : make_format(syntax, maker_, taker)) {}

bool is_json_array(const PlainContext& context, std::string_view file_name) {
  if (context.mapped) return context.mapped->syntax == ExportSyntax::json_array;
  return plain_syntax_of(file_name) == PlainSyntax::json_array;
}

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
