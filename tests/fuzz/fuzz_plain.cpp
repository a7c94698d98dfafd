// The plain format; AGREED_FUZZ_SYNTAX says which syntax. The first byte is the size of the blocks.
#include <cstdint>

#include "tests/fuzz/read_twice.hpp"

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  if (size == 0) return 0;
  const std::string_view text(reinterpret_cast<const char*>(data + 1), size - 1);
  agreed::fuzz::read_twice(text, 1U + data[0], agreed::PlainSyntax::AGREED_FUZZ_SYNTAX);
  return 0;
}
