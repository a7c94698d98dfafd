#pragma once
// One flat JSON object to a row of the plain format.
#include <cstdint>
#include <memory>
#include <string_view>

#include "daemon/intake/row_maker.hpp"

namespace agreed {

class JsonObjectReader {
 public:
  JsonObjectReader(const RowMaker& maker, RowTaker& taker);
  ~JsonObjectReader();

  /// Gives the taker what `text`, found at `line`, holds: rows, or one bad row.
  void read(std::string_view text, std::uint32_t line);

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

}  // namespace agreed
