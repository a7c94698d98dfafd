#pragma once
// A figure of the page: drawing, caption in words, and the same data as a table.
#include <string>
#include <vector>

namespace agreed {

/// Cells are plain text; the first column heads its row. `heads` may be empty: of facts, a row each.
struct DataTable {
  std::string caption;
  std::vector<std::string> heads;
  std::vector<std::vector<std::string>> rows;
};

struct LegendEntry {
  std::string sample_html;  ///< see legend_line, legend_shape
  std::string words;
};

struct Figure {
  std::string id;  ///< unique in the page, fit for an id attribute
  std::string heading;
  std::string summary;  ///< the finding in words
  std::string drawing;  ///< SVG; for all widths when `wide` is empty; may be empty
  std::string wide;     ///< SVG for broad screens
  std::vector<LegendEntry> legend;
  DataTable table;
};

/// How much of a figure is shown: a small one among many, or a large one on a page of its own.
enum class FigureDetail { small, full };

/// Cuts a table that runs newest first to its first `most` rows and says so in its caption.
void keep_newest(DataTable& table, std::size_t most);
[[nodiscard]] std::string table_html(const DataTable& table);
/// The table folded away under `words`; `id` keeps it open over a refresh.
[[nodiscard]] std::string folded_table_html(const std::string& id, const std::string& words,
                                            const DataTable& table);
/// `level`: of the heading, 2..6.
[[nodiscard]] std::string figure_html(const Figure& figure, int level);

/// Little samples for a legend.
[[nodiscard]] std::string legend_line(const std::string& css);
[[nodiscard]] std::string legend_dot(const std::string& css);
[[nodiscard]] std::string legend_area(const std::string& css);
[[nodiscard]] std::string legend_path(const std::string& css, const std::string& d);

}  // namespace agreed
