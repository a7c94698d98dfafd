#pragma once
// Files of a mapped format: decoded, cut into rows, mapped.
#include <memory>

#include "config/mapped_format.hpp"
#include "daemon/intake/row_format.hpp"
#include "daemon/intake/row_maker.hpp"

namespace agreed {

/// References must outlive the result. Throws std::runtime_error if the system does not know the character
/// set.
[[nodiscard]] std::unique_ptr<RowFormat> make_mapped_rows(const MappedFormat& format,
                                                          const PlainContext& context, const RowMaker& maker,
                                                          RowTaker& taker);

}  // namespace agreed
