#include "daemon/intake/text_decoder.hpp"

#include <array>
#include <cerrno>
#include <stdexcept>

#include <iconv.h>

namespace agreed {
namespace {

constexpr char kUnreadable = '\xFF';

}  // namespace

TextDecoder::TextDecoder(const std::string& encoding)
    : state_(iconv_open("UTF-8", encoding.c_str())), unit_(encoding.starts_with("utf-16") ? 2 : 1) {
  if (state_ ==
      reinterpret_cast<iconv_t>(-1))  // NOLINT(performance-no-int-to-ptr): iconv's own sign of failure
    throw std::runtime_error("the system knows no character set " + encoding);
}

TextDecoder::~TextDecoder() {
  iconv_close(state_);
}

std::string_view TextDecoder::decode(std::string_view bytes) {
  text_.clear();
  if (waiting_.empty()) {
    convert(bytes);
  } else {
    const std::string all = waiting_.append(bytes);
    waiting_.clear();
    convert(all);
  }
  return text_;
}

std::string_view TextDecoder::finish() {
  text_.assign(waiting_.empty() ? 0 : 1, kUnreadable);
  waiting_.clear();
  return text_;
}

void TextDecoder::convert(std::string_view bytes) {
  std::array<char, 16'384> block{};
  char* in = const_cast<char*>(bytes.data());  // iconv's declaration; it does not write there
  std::size_t left = bytes.size();
  while (left > 0) {
    char* out = block.data();
    std::size_t room = block.size();
    const std::size_t done = iconv(state_, &in, &left, &out, &room);
    const int error = done == static_cast<std::size_t>(-1) ? errno : 0;
    text_.append(block.data(), block.size() - room);
    if (error == EINVAL) {
      waiting_.assign(in, left);
      return;
    }
    if (error != EILSEQ) continue;
    text_ += kUnreadable;
    const std::size_t skipped = left < unit_ ? left : unit_;
    in += skipped;
    left -= skipped;
  }
}

}  // namespace agreed
