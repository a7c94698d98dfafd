#include <algorithm>
#include <map>
#include <optional>
#include <string>

#include "config/parts.hpp"
#include "config/value_text.hpp"

namespace agreed::settings_file {
namespace {

void check_format(const Section& analyzer, const Section& top, const std::string& format) {
  std::vector<std::string> known = {"plain"};
  for (const Section& mapped : top.named("formats")) known.push_back(mapped.id());
  if (std::find(known.begin(), known.end(), format) == known.end())
    analyzer.error("format", not_one_of(format, known));
}

/// Its own, or that of its format.
FileMode mode_of(const Section& analyzer, const Section& top, const std::string& format) {
  std::optional<std::string> mode = analyzer.text("mode");
  for (const Section& mapped : top.named("formats"))
    if (!mode && mapped.id() == format) mode = mapped.text("mode");
  return mode == "growing" ? FileMode::growing : FileMode::whole;
}

IntakeSettings intake_of(const Section& analyzer, const Section& top, const std::filesystem::path& folder) {
  IntakeSettings intake;
  intake.analyzer = analyzer.id();
  if (const auto inbox = analyzer.text("inbox")) intake.inbox = resolved(folder, *inbox);
  intake.format = analyzer.text("format").value_or(intake.format);
  check_format(analyzer, top, intake.format);
  intake.zone = analyzer.text("zone").value_or(intake.zone);
  intake.not_before = analyzer.time("not_before").value_or(intake.not_before);
  intake.settle = analyzer.duration("settle").value_or(intake.settle);
  intake.rescan = analyzer.duration("rescan").value_or(intake.rescan);
  intake.mode = mode_of(analyzer, top, intake.format);
  const bool whole_file = analyzer.text("on_bad_row") == "reject_file";
  intake.on_bad_row = whole_file ? BadRowPolicy::reject_file : BadRowPolicy::keep_good;
  if (whole_file && intake.mode == FileMode::growing) {
    analyzer.error("on_bad_row",
                   "found 'reject_file', expected keep_good: a file that grows is never there as a whole");
    intake.on_bad_row = BadRowPolicy::keep_good;
  }
  return intake;
}

}  // namespace

void read_analyzers(const Section& top, const std::filesystem::path& folder, Draft& draft) {
  std::map<std::filesystem::path, std::string> owners;
  for (const Section& analyzer : top.named("analyzers")) {
    draft.settings.analyzers.push_back({analyzer.id(), analyzer.text("title").value_or(analyzer.id())});
    draft.config.intake.push_back(intake_of(analyzer, top, folder));
    const auto& inbox = draft.config.intake.back().inbox;
    if (inbox.empty()) continue;
    const auto [owner, first] = owners.emplace(inbox, analyzer.id());
    if (!first)
      analyzer.error("inbox",
                     "found the inbox of analyzer " + owner->second + " again, expected one of its own");
  }
}

}  // namespace agreed::settings_file
