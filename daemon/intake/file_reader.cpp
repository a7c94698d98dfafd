#include "daemon/intake/file_reader.hpp"

#include <optional>
#include <utility>

#include "daemon/sha256.hpp"

namespace agreed {
namespace {

constexpr std::size_t kMostReasons = 1000;

/// Thrown through the parser when nobody wants more pieces.
struct GivenUp {};

std::string place_and_reason(const BadRow& bad) {
  std::string words = "\nline ";
  words += std::to_string(bad.line);
  if (bad.column != 0) words.append(", column ").append(std::to_string(bad.column));
  return words.append(": ").append(bad.reason);
}

/// Only looks whether there is a bad row, for BadRowPolicy::reject_file.
class Judge final : public RowTaker {
 public:
  void good(Row&&) override {}
  void bad(BadRow&& row) override {
    if (++count_ <= kMostReasons) reasons_ += place_and_reason(row);
  }
  /// Why the file is refused; empty if it is not.
  [[nodiscard]] std::string verdict() const {
    if (count_ == 0) return {};
    std::string words = std::to_string(count_) + (count_ == 1 ? " bad row" : " bad rows") +
                        ", and this folder takes whole files only (on_bad_row: reject_file)" + reasons_;
    if (count_ > kMostReasons) words += "\n... and " + std::to_string(count_ - kMostReasons) + " more";
    return words;
  }

 private:
  std::size_t count_ = 0;
  std::string reasons_;
};

/// Collects rows and gives them away whenever a piece is full.
class PieceMaker final : public RowTaker {
 public:
  PieceMaker(FileIdentity file, const ReadLimits& limits, const std::function<bool(FilePiece&&)>& give)
      : limits_(limits), give_(give) {
    piece_.file = std::move(file);
  }

  void good(Row&& row) override {
    make_room(row.item.size() + row.by.size() + row.note.size());
    piece_.rows.push_back(std::move(row));
  }
  void bad(BadRow&& row) override {
    make_room(row.text.size() + row.reason.size());
    piece_.bad.push_back(std::move(row));
  }
  bool give_last(std::string unusable) {
    piece_.last = true;
    piece_.unusable = std::move(unusable);
    return give_(std::move(piece_));
  }

 private:
  void make_room(std::size_t bytes) {
    if (piece_.rows.size() + piece_.bad.size() >= limits_.piece_rows || bytes_ > limits_.piece_bytes) {
      FilePiece full = std::exchange(piece_, FilePiece{piece_.file, piece_.piece + 1, false, {}, {}, {}});
      bytes_ = 0;
      if (!give_(std::move(full))) throw GivenUp{};
    }
    bytes_ += bytes;
  }

  ReadLimits limits_;
  const std::function<bool(FilePiece&&)>& give_;
  FilePiece piece_;
  std::size_t bytes_ = 0;
};

class Reading {
 public:
  Reading(const FileContent& content, const ReadTask& task, const PlainContext& context,
          const std::function<bool(FilePiece&&)>& give)
      : content_(content), task_(task), context_(context), give_(give), stamp_(content.stamp()) {}

  ReadOutcome run() {
    identity_ = {context_.analyzer, task_.name,     stamp_.size,
                 stamp_.mtime_ns,   Sha256().hex(), stamp_.status_ns};
    if (stamp_.size > task_.limits.file_bytes)
      return refuse("the file has " + std::to_string(stamp_.size) + " bytes; at most " +
                    std::to_string(task_.limits.file_bytes) + " are read");
    std::string verdict = first_pass();
    if (task_.stop.stop_requested()) return ReadOutcome::given_up;
    if (has_changed()) return ReadOutcome::changed;
    return verdict.empty() ? second_pass() : refuse(std::move(verdict));
  }

 private:
  [[nodiscard]] bool has_changed() const { return !content_.stamp().same_content(stamp_); }

  std::string first_pass() {
    Sha256 hash;
    Judge judge;
    std::optional<PlainReader> strict;
    if (task_.on_bad_row == BadRowPolicy::reject_file)
      strict.emplace(context_, plain_syntax_of(task_.name), judge);
    content_.each_block([&](std::string_view block) {
      hash.update(block);
      if (strict) strict->feed(block);
      return !task_.stop.stop_requested();
    });
    identity_.sha256 = hash.hex();
    if (!strict) return {};
    strict->finish(task_.closed);
    return strict->unusable().empty() ? judge.verdict() : strict->unusable();
  }

  ReadOutcome second_pass() {
    Sha256 hash;
    PieceMaker pieces(identity_, task_.limits, give_);
    PlainReader rows(context_, plain_syntax_of(task_.name), pieces);
    try {
      const bool whole = content_.each_block([&](std::string_view block) {
        hash.update(block);
        const bool go_on = rows.feed(block);
        return go_on;
      });
      if (whole) rows.finish(task_.closed);
      if (has_changed() || (whole && hash.hex() != identity_.sha256)) return ReadOutcome::changed;
    } catch (const GivenUp&) {
      return ReadOutcome::given_up;
    }
    return pieces.give_last(rows.unusable()) ? ReadOutcome::given : ReadOutcome::given_up;
  }

  ReadOutcome refuse(std::string why) {
    PieceMaker pieces(identity_, task_.limits, give_);
    return pieces.give_last(std::move(why)) ? ReadOutcome::given : ReadOutcome::given_up;
  }

  const FileContent& content_;
  const ReadTask& task_;
  const PlainContext& context_;
  const std::function<bool(FilePiece&&)>& give_;
  FileStamp stamp_;
  FileIdentity identity_;
};

}  // namespace

ReadOutcome read_file(const FileContent& content, const ReadTask& task, const PlainContext& context,
                      const std::function<bool(FilePiece&&)>& give) {
  return Reading(content, task, context, give).run();
}

FilePiece unreadable_piece(AnalyzerIndex analyzer, const std::string& name, std::string why) {
  FilePiece piece;
  piece.file = {analyzer, name, 0, 0, Sha256().hex()};
  piece.last = true;
  piece.unusable = std::move(why);
  return piece;
}

}  // namespace agreed
