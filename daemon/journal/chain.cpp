#include "daemon/journal/chain.hpp"

#include <array>
#include <bit>
#include <charconv>

namespace agreed::journal {
namespace {

constexpr std::size_t kFlushAt = std::size_t{32} * 1024;

void append_number(std::string& to, std::int64_t value) {
  std::array<char, 20> digits{};
  const auto end = std::to_chars(digits.data(), digits.data() + digits.size(), value).ptr;
  to.append(digits.data(), end);
}

}  // namespace

BatchText::BatchText() {
  buffer_.reserve(2 * kFlushAt);
}

void BatchText::begin(std::int64_t sequence, std::string_view previous, Instant committed_at) {
  hash_.start_over();
  buffer_.clear();
  begin_row("batch");
  integer(sequence);
  text(previous);
  integer(committed_at.time_since_epoch().count());
  end_row();
}

void BatchText::begin_row(std::string_view table) {
  row_start_ = buffer_.size();
  buffer_.append(table);
}

void BatchText::integer(std::int64_t value) {
  buffer_.push_back('\t');
  append_number(buffer_, value);
}

// The bits and not digits: exact, and the same in every language.
void BatchText::real(double value) {
  std::array<char, 16> digits{};
  const auto bits = std::bit_cast<std::uint64_t>(value);
  const auto end = std::to_chars(digits.data(), digits.data() + digits.size(), bits, 16).ptr;
  buffer_.push_back('\t');
  buffer_.append(digits.data(), end);
}

void BatchText::text(std::string_view value) {
  buffer_.push_back('\t');
  for (std::size_t at = 0; at < value.size();) {
    const std::size_t special = std::min(value.find_first_of("\\\t\n", at), value.size());
    buffer_.append(value, at, special - at);
    if (special == value.size()) break;
    buffer_.push_back('\\');
    buffer_.push_back(value[special] == '\t' ? 't' : value[special] == '\n' ? 'n' : '\\');
    at = special + 1;
  }
}

void BatchText::end_row() {
  buffer_.push_back('\n');
  if (buffer_.size() >= kFlushAt) flush();
}

void BatchText::flush() {
  hash_.update(buffer_);
  buffer_.clear();
}

std::string BatchText::finish() {
  flush();
  return hash_.hex();
}

std::string chain_start(std::string_view source, Instant created_at) {
  BatchText start;
  start.begin(0, source, created_at);
  return start.finish();
}

}  // namespace agreed::journal
