#pragma once
// How an analyzer's own export is built, and which of its columns mean what.
#include <map>
#include <optional>
#include <string>
#include <vector>

#include "config/file_mode.hpp"

namespace agreed {

enum class ExportSyntax { csv, json_lines, json_array };

/// Names of files to take and to ignore, as patterns with * ? and [..], letter case ignored.
struct FileNames {
  std::string take = "*";
  std::vector<std::string> ignore;
};

/// A column with results; each result is multiplied by the factor.
struct ResultColumn {
  std::string column;
  double factor = 1;
};

/// Of a wide format: the column of one measurand.
struct MeasurandColumn {
  std::string measurand;
  ResultColumn result;
};

struct MappedTime {
  std::vector<std::string> columns;  ///< one, or date and time; then read with a space between them
  std::string pattern;               ///< of TimePattern; empty: RFC 3339
  std::optional<std::string> zone;   ///< else the analyzer's
};

/// The kind of a row: the word in a column translated, or a pattern (RE2) on the item as the instrument
/// writes it, else `otherwise`.
struct MappedKind {
  std::optional<std::string> column;
  std::map<std::string, std::string> words;  ///< in that column: kinds of the plain format
  std::optional<std::string> check_pattern;
  std::string otherwise = "split";
};

/// Rows to leave out: those where the column's text matches the pattern (RE2).
struct SkippedRows {
  std::string column, pattern;
};

/// One of `formats`. A column is named by the header, by its number where there is no header, or by the key
/// of a JSON object (of a nested one: "sample.id").
struct MappedFormat {
  std::string id;
  ExportSyntax syntax = ExportSyntax::csv;
  char delimiter = ',';
  char decimal = '.';
  std::string thousands;  ///< empty: none
  std::string encoding = "utf-8";
  int skip_lines = 0;
  bool header = true;
  FileMode mode = FileMode::whole;
  FileNames files;

  MappedTime time;
  std::optional<std::string> item;  ///< its column
  std::map<std::string, std::string> items;
  MappedKind kind;
  std::optional<std::string> measurand;  ///< its column, of a long format
  std::map<std::string, std::string> measurands;
  std::optional<ResultColumn> value, x, y;
  std::vector<MeasurandColumn> values;           ///< of a wide format
  std::map<std::string, double> factors;         ///< of a long format, by measurand
  std::map<std::string, std::string> columns;    ///< of the other columns of the plain format, by its name
  std::map<std::string, std::string> constants;  ///< texts that every row has, likewise
  std::vector<std::string> notes;                ///< columns that are kept in the note
  std::vector<std::string> no_value;             ///< texts that say that there is no result
  std::optional<SkippedRows> skip_rows;
};

}  // namespace agreed
