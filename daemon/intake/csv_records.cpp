#include "daemon/intake/csv_records.hpp"

#include <new>
#include <utility>
#include <vector>

#include <csv.h>

#include "daemon/intake/line_splitter.hpp"
#include "daemon/intake/text.hpp"

namespace agreed {
namespace {

/// libcsv, fed line by line so that each record's line and text are known.
class CsvParser {
 public:
  enum class Step { record, blank, open, broken };  ///< open: within quotes at the end of the line

  explicit CsvParser(char delimiter) : delimiter_(delimiter) { reset(); }
  ~CsvParser() { csv_free(&parser_); }
  CsvParser(const CsvParser&) = delete;
  CsvParser& operator=(const CsvParser&) = delete;

  Step parse(std::string_view line) {
    if (done_) clear();
    if (csv_parse(&parser_, line.data(), line.size(), on_field, on_record, this) != line.size() ||
        csv_parse(&parser_, "\n", 1, on_field, on_record, this) != 1) {
      reset();
      return Step::broken;
    }
    if (done_) return Step::record;
    return parser_.pstate == 0 ? Step::blank : Step::open;  // 0: no row begun
  }

  void reset() {
    csv_free(&parser_);
    parser_ = {};
    if (csv_init(&parser_, CSV_STRICT) != 0) throw std::bad_alloc();
    csv_set_delim(&parser_, static_cast<unsigned char>(delimiter_));
    // A tab between columns is no blank to be cut.
    if (delimiter_ == '\t')
      csv_set_space_func(&parser_, [](unsigned char c) { return c == CSV_SPACE ? 1 : 0; });
    csv_set_term_func(&parser_, [](unsigned char c) { return c == CSV_LF ? 1 : 0; });
    clear();
  }

  /// Of the record just parsed.
  [[nodiscard]] std::span<const std::string_view> fields() {
    fields_.clear();
    std::size_t begin = 0;
    for (const std::size_t end : ends_) {
      fields_.push_back(std::string_view(text_).substr(begin, end - begin));
      begin = end;
    }
    return fields_;
  }

 private:
  static void on_field(void* text, std::size_t size, void* self) {
    auto& parser = *static_cast<CsvParser*>(self);
    parser.text_.append(static_cast<const char*>(text), size);
    parser.ends_.push_back(parser.text_.size());
  }
  static void on_record(int, void* self) { static_cast<CsvParser*>(self)->done_ = true; }

  void clear() {
    text_.clear();
    ends_.clear();
    done_ = false;
  }

  char delimiter_;
  csv_parser parser_{};
  std::string text_;               ///< the fields of a record, one after the other
  std::vector<std::size_t> ends_;  ///< where each ends
  std::vector<std::string_view> fields_;
  bool done_ = false;
};

class CsvRecords final : public RowFormat {
 public:
  CsvRecords(const CsvDialect& dialect, RecordTaker& taker)
      : dialect_(dialect), taker_(taker), parser_(dialect.delimiter), have_header_(!dialect.header) {}

  void feed(std::string_view block) override {
    if (!unusable_.empty()) return;
    lines_.feed(block, [this](std::string_view line, std::uint32_t number, bool too_long) {
      return take(line, number, too_long);
    });
  }

  void pause() override {
    if (unusable_.empty()) give_up_open();
  }

  void finish(bool closed) override {
    if (!unusable_.empty()) return;
    if (lines_.has_rest() && !closed && have_header_) {
      give_up_open();
      refuse(lines_.next_line(), lines_.rest(), "the last line has no line end, so it may be incomplete");
    } else {
      lines_.finish([this](std::string_view line, std::uint32_t number, bool too_long) {
        return take(line, number, too_long);
      });
      give_up_open();
    }
    if (!have_header_ && unusable_.empty()) unusable_ = "the file is empty; a header row was expected";
  }

 private:
  using Step = CsvParser::Step;

  bool take(std::string_view line, std::uint32_t number, bool too_long) {
    if (number == 1 && line.starts_with("\xEF\xBB\xBF")) line.remove_prefix(3);
    if (line.ends_with('\r')) line.remove_suffix(1);
    if (!is_text_ && !may_be_text(line)) return false;
    if (number <= static_cast<std::uint32_t>(dialect_.skip_lines)) return true;
    is_text_ = is_text_ || have_header_;
    if (too_long) {
      give_up_open();
      refuse(number, line, "the line is longer than 1 MiB");
    } else {
      step(line, number);
      read_again();
    }
    return unusable_.empty();
  }

  bool may_be_text(std::string_view line) {
    if (line.starts_with("\xFF\xFE") || line.starts_with("\xFE\xFF"))
      unusable_ = "the file is in UTF-16; UTF-8 was expected";
    else if (line.find('\0') != std::string_view::npos || line.size() >= kMostLineBytes)
      unusable_ =
          "the file is not text: its first line is " + in_quotes(line) + "; a header row was expected";
    return unusable_.empty();
  }

  void step(std::string_view line, std::uint32_t number) {
    const Step step = parser_.parse(line);
    if (open_.empty() && step != Step::open) {
      if (step == Step::record) record(number, line);
      if (step == Step::broken) refuse_quotes(number, line);
      return;
    }
    if (open_.empty()) open_line_ = number;
    open_.append(line).push_back('\n');
    if (step == Step::record) {
      record(open_line_, open_);
      open_.clear();
    } else if (step == Step::broken || open_.size() > kMostLineBytes) {
      break_open();
    }
  }

  /// Gives up the open record: its first line is bad, the others are to be read again on their own.
  void break_open() {
    parser_.reset();
    const std::size_t rest = open_.find('\n') + 1;
    refuse_quotes(open_line_, std::string_view(open_).substr(0, rest - 1));
    if (reading_again_) {
      again_at_ -= open_.size() - rest;  // a record opened meanwhile consists of the lines read last
    } else {
      again_ = open_.substr(rest);
      again_at_ = 0;
    }
    again_line_ = open_line_ + 1;
    open_.clear();
  }

  void read_again() {
    reading_again_ = true;
    while (again_at_ < again_.size() && unusable_.empty()) {
      const std::size_t end = again_.find('\n', again_at_);
      const std::string_view line = std::string_view(again_).substr(again_at_, end - again_at_);
      again_at_ = end + 1;
      step(line, again_line_++);
    }
    reading_again_ = false;
    again_.clear();
    again_at_ = 0;
  }

  void give_up_open() {
    while (!open_.empty() && unusable_.empty()) {
      break_open();
      read_again();
    }
  }

  void record(std::uint32_t line, std::string_view whole) {
    if (have_header_) return taker_.record(line, whole, parser_.fields());
    unusable_ = taker_.header(parser_.fields());
    have_header_ = is_text_ = unusable_.empty();
  }

  void refuse_quotes(std::uint32_t line, std::string_view whole) {
    refuse(line, whole, "a quote is misplaced or not closed");
  }

  void refuse(std::uint32_t line, std::string_view whole, std::string reason) {
    if (have_header_)
      taker_.bad(bad_row(line, 0, whole, std::move(reason)));
    else
      unusable_ = "no header row: in line " + std::to_string(line) + " " + reason;
  }

  CsvDialect dialect_;
  RecordTaker& taker_;
  LineSplitter lines_;
  CsvParser parser_;
  bool have_header_;
  bool is_text_ = false;  ///< looked at far enough
  std::string open_;      ///< lines of a record within quotes
  std::uint32_t open_line_ = 0;
  std::string again_;  ///< lines to be read again
  bool reading_again_ = false;
  std::size_t again_at_ = 0;
  std::uint32_t again_line_ = 0;
};

}  // namespace

std::unique_ptr<RowFormat> make_csv_records(const CsvDialect& dialect, RecordTaker& taker) {
  return std::make_unique<CsvRecords>(dialect, taker);
}

}  // namespace agreed
