#include "daemon/intake/growing_file.hpp"

#include <algorithm>
#include <array>
#include <system_error>
#include <utility>

#include "daemon/intake/line_end.hpp"

namespace agreed {
namespace {

constexpr std::size_t kGrowingBlock = std::size_t{64} * 1024;
constexpr std::uint64_t kEnd = std::uint64_t{512} * 1024;

/// Gives the bytes from `from` to `to` in blocks, fewer when the file ends before; the number given.
std::uint64_t each_block_between(const FileContent& content, std::uint64_t from, std::uint64_t to,
                                 const std::function<void(std::string_view)>& take) {
  std::vector<char> block(kGrowingBlock);
  std::uint64_t at = from;
  while (at < to) {
    const auto most = static_cast<std::size_t>(std::min<std::uint64_t>(block.size(), to - at));
    const std::size_t got = content.read(at, {block.data(), most});
    if (got == 0) break;
    take({block.data(), got});
    at += got;
  }
  return at - from;
}

/// Of the first `size` bytes: of all of them, or of both ends when they are many.
std::string fingerprint_of(const FileContent& content, std::uint64_t size) {
  Sha256 hash;
  const auto add = [&hash](std::string_view bytes) { hash.update(bytes); };
  if (size <= 2 * kEnd) {
    each_block_between(content, 0, size, add);
  } else {
    each_block_between(content, 0, kEnd, add);
    each_block_between(content, size - kEnd, size, add);
  }
  return hash.hex();
}

LineEnd line_end_of(const PlainContext& context, const FileContent& content) {
  std::array<char, 2> begin{};
  const std::size_t got = content.read(0, begin);
  return {context.mapped ? context.mapped->encoding : "utf-8", {begin.data(), got}};
}

/// The position behind the first line end at or after `from`, where a character begins; nothing if there is
/// none. In bounded memory.
std::optional<std::uint64_t> behind_line_end(const FileContent& content, const LineEnd& line_end,
                                             std::uint64_t from) {
  std::vector<char> block(kGrowingBlock);
  for (std::uint64_t at = from;;) {
    const std::size_t got = content.read(at, block);
    if (const auto behind = line_end.behind_first({block.data(), got})) return at + *behind;
    const std::size_t whole = got - got % line_end.unit();
    if (whole == 0) return std::nullopt;
    at += whole;
  }
}

}  // namespace

struct GrowingFile::Collected final : RowTaker {
  void good(Row&& row) override {
    if (wanted) rows.push_back(std::move(row));
  }
  void bad(BadRow&& row) override {
    if (wanted) bad_rows.push_back(std::move(row));
  }

  bool wanted = false;  ///< false while what was taken before goes through the reader again
  std::vector<Row> rows;
  std::vector<BadRow> bad_rows;
};

GrowingFile::GrowingFile(PlainContext context, PlainSyntax syntax, const ReadLimits& limits)
    : context_(std::move(context)), syntax_(syntax), limits_(limits) {
  forget_all();
}

GrowingFile::~GrowingFile() = default;

void GrowingFile::forget_all() {
  taken_ = 0;
  sha256_ = fingerprint_ = Sha256().hex();
  unusable_ = false;
  reader_.reset();
}

void GrowingFile::place(const FileContent& content, const std::vector<TakenPortion>& known) {
  forget_all();
  const std::uint64_t size = content.stamp().size;
  std::vector<const TakenPortion*> candidates;
  for (const TakenPortion& portion : known)
    if (portion.size > 0 && portion.size <= size) candidates.push_back(&portion);
  std::sort(candidates.begin(), candidates.end(),
            [](const TakenPortion* a, const TakenPortion* b) { return a->size < b->size; });
  Sha256 hash;
  std::uint64_t at = 0;
  std::string sha256;
  for (const TakenPortion* candidate : candidates) {
    if (candidate->size > at) {
      at += each_block_between(content, at, candidate->size,
                               [&](std::string_view bytes) { hash.update(bytes); });
      sha256 = hash.hex_so_far();
    }
    if (candidate->size != at) break;  // cut meanwhile
    if (sha256 != candidate->sha256) continue;
    taken_ = at;
    sha256_ = sha256;
  }
  fingerprint_ = fingerprint_of(content, taken_);
}

void GrowingFile::place_at(const TakenPortion& portion) {
  forget_all();
  taken_ = portion.size;
  sha256_ = portion.sha256;
  fingerprint_.clear();  // not looked at: place it again before it is read
}

bool GrowingFile::begins_as_taken(const FileContent& content) const {
  return content.stamp().size >= taken_ && fingerprint_of(content, taken_) == fingerprint_;
}

std::optional<FilePiece> GrowingFile::read_on(const FileContent& content, const std::string& name,
                                              Instant now) {
  if (unusable_) return std::nullopt;
  const LineEnd line_end = line_end_of(context_, content);
  if (!behind_line_end(content, line_end, taken_)) return std::nullopt;
  if (!reader_) begin_reader(content);
  reader_->set_now(now);
  const FileStamp stamp = content.stamp();
  if (!feed_lines(content, line_end)) return std::nullopt;
  reader_->pause();
  sha256_ = hash_.hex_so_far();
  remember(content);

  FilePiece piece;
  piece.file = {context_.analyzer, name, taken_, stamp.mtime_ns, sha256_};
  piece.last = piece.growing = true;
  piece.rows = std::exchange(rows_->rows, {});
  piece.bad = std::exchange(rows_->bad_rows, {});
  piece.unusable = reader_->unusable();
  unusable_ = !piece.unusable.empty();
  return piece;
}

void GrowingFile::begin_reader(const FileContent& content) {
  rows_ = std::make_unique<Collected>();
  reader_ = std::make_unique<PlainReader>(context_, syntax_, *rows_);
  hash_.start_over();
  each_block_between(content, 0, taken_, [&](std::string_view bytes) { feed(bytes); });
  reader_->pause();
  rows_->wanted = true;
  if (hash_.hex_so_far() == sha256_) return;
  reader_.reset();
  throw std::system_error(std::make_error_code(std::errc::resource_unavailable_try_again),
                          "it was written anew while it was read");
}

void GrowingFile::feed(std::string_view bytes) {
  hash_.update(bytes);
  reader_->feed(bytes);
}

/// Feeds whole lines until there are enough rows; false if there was none.
bool GrowingFile::feed_lines(const FileContent& content, const LineEnd& line_end) {
  std::vector<char> block(kGrowingBlock);
  const std::uint64_t begin = taken_;
  const auto enough = [&] {
    return rows_->rows.size() + rows_->bad_rows.size() >= limits_.piece_rows || !reader_->unusable().empty();
  };
  while (!enough()) {
    const std::size_t got = content.read(taken_, block);
    if (const auto behind = line_end.behind_last({block.data(), got})) {
      feed({block.data(), *behind});
      taken_ += *behind;
      continue;
    }
    const auto end = behind_line_end(content, line_end, taken_);  // of a line longer than a block
    if (!end) break;
    taken_ += each_block_between(content, taken_, *end, [&](std::string_view bytes) { feed(bytes); });
  }
  return taken_ != begin;
}

void GrowingFile::remember(const FileContent& content) {
  // What was read is what is remembered where possible; both ends of a large file are read once more.
  fingerprint_ = taken_ <= 2 * kEnd ? sha256_ : fingerprint_of(content, taken_);
}

BadRow GrowingFile::unfinished_line(const FileContent& content) const {
  std::uint32_t line = 1;
  each_block_between(content, 0, taken_, [&line](std::string_view bytes) {
    line += static_cast<std::uint32_t>(std::count(bytes.begin(), bytes.end(), '\n'));
  });
  std::vector<char> text(kMostQuotedBytes);
  text.resize(content.read(taken_, text));
  return bad_row(line, 0, {text.data(), text.size()},
                 "the last line has no line end and the file was renamed away, so it may be incomplete");
}

}  // namespace agreed
