#pragma once
// JSON lines, and one JSON array, of objects.
#include <memory>

#include "daemon/intake/json_object.hpp"
#include "daemon/intake/row_format.hpp"
#include "daemon/intake/row_maker.hpp"

namespace agreed {

/// Each object to `taker`, which must outlive the result.
[[nodiscard]] std::unique_ptr<RowFormat> make_json_line_objects(JsonShape shape, ObjectTaker& taker);
[[nodiscard]] std::unique_ptr<RowFormat> make_json_array_objects(JsonShape shape, ObjectTaker& taker);

/// Flat objects whose members are the columns of the plain format. A member is a string, a number, true,
/// false or null (as if it were not there); nested values and repeated names make a bad row. References must
/// outlive the results.
[[nodiscard]] std::unique_ptr<RowFormat> make_json_line_rows(const RowMaker& maker, RowTaker& taker);
[[nodiscard]] std::unique_ptr<RowFormat> make_json_array_rows(const RowMaker& maker, RowTaker& taker);

}  // namespace agreed
