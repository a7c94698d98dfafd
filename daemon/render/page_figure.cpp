#include "daemon/render/page_figure.hpp"

#include "daemon/render/page_text.hpp"

namespace agreed {
namespace {

std::string sample(const std::string& inside) {
  return "<svg class=\"sample\" viewBox=\"0 0 26 16\" aria-hidden=\"true\" focusable=\"false\">" + inside +
         "</svg>";
}

std::string legend_html(const std::vector<LegendEntry>& legend) {
  if (legend.empty()) return {};
  std::string out = "<ul class=\"legend\">";
  for (const LegendEntry& entry : legend)
    out += "<li>" + entry.sample_html + " <span>" + flowing_html(entry.words) + "</span>" + "</li>";
  return out + "</ul>";
}

}  // namespace

void keep_newest(DataTable& table, std::size_t most) {
  if (table.rows.size() <= most) return;
  table.caption += " (" + std::to_string(most) + " of " + std::to_string(table.rows.size()) +
                   ", the others are on its own page)";
  table.rows.resize(most);
}

std::string table_html(const DataTable& table) {
  // Tables that need more room than there is scroll by themselves; the focus lets the keyboard scroll them.
  std::string out = "<div class=\"scroll\" tabindex=\"0\" role=\"region\" aria-label=\"" +
                    escaped(table.caption) + "\"><table><caption>" + escaped(table.caption) + "</caption>";
  if (!table.heads.empty()) {
    out += "<thead><tr>";
    for (const std::string& head : table.heads) out += "<th scope=\"col\">" + escaped(head) + "</th>";
    out += "</tr></thead>";
  }
  out += "<tbody>";
  for (const auto& row : table.rows) {
    out += "<tr>";
    for (std::size_t i = 0; i < row.size(); ++i)
      out += (i == 0 ? "<th scope=\"row\">" : "<td>") + escaped(row[i]) + (i == 0 ? "</th>" : "</td>");
    out += "</tr>";
  }
  return out + "</tbody></table></div>";
}

std::string folded_table_html(const std::string& id, const std::string& words, const DataTable& table) {
  if (table.rows.empty()) return {};
  return "<details id=\"" + id + "\"><summary>" + escaped(words) + "</summary>" + table_html(table) +
         "</details>";
}

std::string figure_html(const Figure& figure, int level) {
  const std::string h = "h" + std::to_string(level);
  std::string out = "<figure id=\"" + figure.id + "\"><" + h + ">" + escaped(figure.heading) + "</" + h + ">";
  if (figure.wide.empty())
    out += figure.drawing;
  else
    out += "<div class=\"narrow\">" + figure.drawing + "</div><div class=\"wide\">" + figure.wide + "</div>";
  out += legend_html(figure.legend);
  out += "<figcaption>" + flowing_html(figure.summary) + "</figcaption>";
  return out + folded_table_html(figure.id + ".data", "Data of this figure", figure.table) + "</figure>";
}

std::string legend_line(const std::string& css) {
  return sample("<line class=\"" + css + "\" x1=\"1\" y1=\"8\" x2=\"25\" y2=\"8\"/>");
}

std::string legend_dot(const std::string& css) {
  return sample("<path class=\"" + css + "\" d=\"M13 8h0\"/>");
}

std::string legend_area(const std::string& css) {
  return sample("<rect class=\"" + css + "\" x=\"1\" y=\"2\" width=\"24\" height=\"12\"/>");
}

std::string legend_path(const std::string& css, const std::string& d) {
  return sample("<path class=\"" + css + "\" d=\"" + d + "\"/>");
}

}  // namespace agreed
