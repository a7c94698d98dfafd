#pragma once
// One JSON object to its members.
#include <cstdint>
#include <memory>
#include <span>
#include <string>
#include <string_view>

#include "daemon/intake/row_maker.hpp"

namespace agreed {

struct JsonMember {
  std::string name, text;  ///< a text, or true, false or a number as written; null is nothing
  bool number = false;
};

/// What is done with the objects of one file.
class ObjectTaker {
 public:
  virtual ~ObjectTaker() = default;
  /// The views hold until the call returns; no name is there twice.
  virtual void object(std::uint32_t line, std::string_view whole, std::span<const JsonMember> members) = 0;
  virtual void bad(BadRow&& row) = 0;
};

/// flat: a member that holds an object or an array makes a bad row. nested: members of inner objects are
/// named "outer.inner", arrays are passed over.
enum class JsonShape : std::uint8_t { flat, nested };

class JsonObjectReader {
 public:
  JsonObjectReader(JsonShape shape, ObjectTaker& taker);
  ~JsonObjectReader();

  /// Gives the taker what `text`, found at `line`, holds: an object, or one bad row.
  void read(std::string_view text, std::uint32_t line);

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

}  // namespace agreed
