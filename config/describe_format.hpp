#pragma once
// The export formats in effect, for a person to read: part of describe().
#include <string>

namespace agreed {

struct MappedFormat;

/// A line a property, indented as describe() does; `used_by`: the analyzers whose files are read so. What is
/// not mapped is left out.
[[nodiscard]] std::string describe_format(const MappedFormat& format, const std::string& used_by);

}  // namespace agreed
