// What came in, and what became of it.
#include <array>

#include "daemon/printable.hpp"
#include "daemon/render/page_figure.hpp"
#include "daemon/render/page_views.hpp"

namespace agreed {
namespace {

constexpr std::array<Choice, 5> kFileChoices = {{{"", "All"},
                                                 {"done", "Taken in"},
                                                 {"rejected", "Rejected"},
                                                 {"repeated", "Came before"},
                                                 {kGrownOutcome, "Growing"}}};

std::string path_of(const std::string& outcome, const std::string& analyzer) {
  std::string query;
  if (!outcome.empty()) query = "outcome=" + path_segment(outcome);
  if (!analyzer.empty()) query += (query.empty() ? "" : "&") + ("analyzer=" + path_segment(analyzer));
  return query.empty() ? "/files" : "/files?" + query;
}

std::string choices_html(const PageInput& input, const FileList& list) {
  std::string out = "<nav class=\"choice\" aria-label=\"Which files\"><ul>";
  for (const Choice& choice : kFileChoices)
    out += choice_link(path_of(choice.value, list.analyzer), choice.words, list.outcome == choice.value);
  out += "</ul></nav>";
  if (!input.snapshot.settings || input.snapshot.settings->analyzers.size() < 2) return out;
  out += "<nav class=\"choice\" aria-label=\"Of which analyzer\"><ul>" +
         choice_link(path_of(list.outcome, {}), "Every analyzer", list.analyzer.empty());
  for (const Analyzer& analyzer : input.snapshot.settings->analyzers)
    out += choice_link(path_of(list.outcome, analyzer.id), analyzer.id, list.analyzer == analyzer.id);
  return out + "</ul></nav>";
}

std::string rows_words(const FileRow& file) {
  std::string out = counted(file.accepted, "row", "rows") + " taken";
  if (file.repeated > 0) out += ", " + std::to_string(file.repeated) + " came before";
  if (file.rejected > 0) out += ", " + std::to_string(file.rejected) + " rejected";
  return out;
}

std::string rejected_html(const FileRow& file) {
  if (file.rejected_rows.empty()) return {};
  DataTable table{"Rejected rows of " + printable(file.name), {"line", "column", "text", "reason"}, {}};
  for (const RejectedRow& row : file.rejected_rows)
    table.rows.push_back({row.line == 0 ? "" : std::to_string(row.line),
                          row.column == 0 ? "" : std::to_string(row.column), printable(row.text),
                          row.reason});
  const std::string words = file.rejected > static_cast<std::int64_t>(file.rejected_rows.size())
                                ? "The first " + std::to_string(file.rejected_rows.size()) + " rejected rows"
                                : "The rejected rows";
  return folded_table_html("rejected." + std::to_string(file.id), words, table);
}

/// The roles are spelled out because narrow screens show the rows as blocks, which drops those of a table.
std::string table_html(const FileList& list) {
  const std::string head = "<th role=\"columnheader\" scope=\"col\">", cell = "<td role=\"cell\">";
  std::string out =
      "<table role=\"table\" class=\"list\"><caption class=\"unseen\">Files, newest first</caption>"
      "<thead role=\"rowgroup\"><tr role=\"row\">" +
      head + "file</th>" + head + "analyzer</th>" + head + "received</th>" + head + "what became of it</th>" +
      head + "rows</th></tr></thead><tbody role=\"rowgroup\">";
  for (const FileRow& file : list.files)
    out += "<tr role=\"row\"><th role=\"rowheader\" scope=\"row\">" + escaped(printable(file.name)) +
           "</th>" + cell + escaped(file.analyzer) + "</td>" + cell + time_html(file.received_at) + "</td>" +
           cell + file_badge_html(file.outcome) + (file.reason.empty() ? "" : "<br>" + escaped(file.reason)) +
           "</td>" + cell + escaped(rows_words(file)) + rejected_html(file) + "</td></tr>";
  return out + "</tbody></table>";
}

std::string totals_words(const IntakeTotals& totals) {
  std::string out = counted(totals.files_done, "file", "files") + " taken in, " +
                    std::to_string(totals.files_repeated) + " came before, " +
                    std::to_string(totals.files_rejected) + " rejected; " +
                    counted(totals.readings_accepted, "reading", "readings") + " accepted.";
  if (totals.last_commit_at) out += " Last stored " + time_words(*totals.last_commit_at) + ".";
  return out;
}

}  // namespace

PageAnswer render_files(const PageInput& input, const FileList& list) {
  std::string out = "<h1>Files</h1>" + starting_html(input) + "<p>" +
                    flowing_html(totals_words(input.snapshot.totals)) + "</p>" + choices_html(input, list);
  if (!list.files.empty())
    out += table_html(list);
  else
    out += list.after.empty() ? "<p>None yet.</p>" : "<p>There are no older ones.</p>";
  const std::string of = path_of(list.outcome, list.analyzer);
  std::string ways;
  if (!list.after.empty()) ways += "<li>" + link_html(of, "Newest") + "</li>";
  if (!list.next.empty())
    ways += "<li>" +
            link_html(of + (of.find('?') == std::string::npos ? "?" : "&") + "after=" + list.next, "Older") +
            "</li>";
  if (!ways.empty()) out += "<nav class=\"choice\" aria-label=\"More files\"><ul>" + ways + "</ul></nav>";
  return document(input, "Files", out);
}

}  // namespace agreed
