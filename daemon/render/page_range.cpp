#include "daemon/render/page_range.hpp"

#include <algorithm>
#include <array>
#include <charconv>

#include "core/base/rfc3339.hpp"
#include "daemon/render/page_text.hpp"

namespace agreed {
namespace {

constexpr int kMost = 500;
constexpr std::array kCountSteps = {30, 60, 120, 250};

std::optional<int> count_of(const std::string& text) {
  int number = 0;
  const auto [end, error] = std::from_chars(text.data(), text.data() + text.size(), number);
  if (error != std::errc() || end != text.data() + text.size() || number < 1 || number > kMost) return {};
  return number;
}

/// What lies between the first and the last one drawn; up to now when the last is the newest.
class Drawn {
 public:
  Drawn(const std::vector<Instant>& times, const RangeCut& cut) {
    none_ = cut.count == 0;
    if (none_) return;
    if (cut.first > 0) from_ = times[cut.first];
    if (cut.first + cut.count < times.size()) until_ = times[cut.first + cut.count];
  }
  [[nodiscard]] bool has(Instant at) const {
    return !none_ && (!from_ || at >= *from_) && (!until_ || at < *until_);
  }

 private:
  bool none_ = false;
  std::optional<Instant> from_, until_;
};

template <class T>
std::vector<T> part_of(const std::vector<T>& all, const RangeCut& cut) {
  const auto begin = all.begin() + static_cast<std::ptrdiff_t>(cut.first);
  return {begin, begin + static_cast<std::ptrdiff_t>(cut.count)};
}

std::string range_link(const std::string& path, const std::string& name, std::size_t count,
                       const std::optional<Instant>& from, const std::string& words) {
  std::string query = name + "=" + std::to_string(count);
  if (from) query += "&from=" + to_rfc3339(*from);
  return "<li><a href=\"" + escaped(path + "?" + query) + "#drawn\">" + escaped(words) + "</a></li>";
}

}  // namespace

PageRange read_range(const std::map<std::string, std::string>& parameters, const std::string& name) {
  PageRange range;
  if (const auto found = parameters.find(name); found != parameters.end()) {
    range.most = count_of(found->second);
    if (!range.most)
      range.error = name + " must be a whole number from 1 to " + std::to_string(kMost) + "; all are shown.";
  }
  if (const auto found = parameters.find("from"); found != parameters.end()) {
    const auto time = parse_rfc3339(found->second);
    if (time && time->offset_given)
      range.from = time->at;
    else
      range.error = "from must be a time like 2026-01-05T06:00:00Z (write + as %2B); the newest are shown.";
  }
  return range;
}

RangeCut cut_of(const std::vector<Instant>& times, const PageRange& range) {
  const std::size_t most = range.most ? static_cast<std::size_t>(*range.most) : times.size();
  if (!range.from) {
    const std::size_t count = std::min(most, times.size());
    return {times.size() - count, count};
  }
  const auto first =
      static_cast<std::size_t>(std::lower_bound(times.begin(), times.end(), *range.from) - times.begin());
  return {first, std::min(most, times.size() - first)};
}

std::vector<Instant> times_of(const ChartView& view) {
  std::vector<Instant> times;
  for (const ChartPoint& point : view.points) times.push_back(point.measured_at);
  return times;
}

std::vector<Instant> times_of(const ComparisonView& view) {
  std::vector<Instant> times;
  for (const PairView& pair : view.pairs) times.push_back(pair.measured_at);
  return times;
}

ChartView cut_to(const ChartView& view, const RangeCut& cut) {
  const Drawn drawn(times_of(view), cut);
  ChartView shown = view;
  shown.points = part_of(view.points, cut);
  std::erase_if(shown.marks, [&](const StretchMark& mark) { return !drawn.has(mark.at); });
  return shown;
}

ComparisonView cut_to(const ComparisonView& view, const RangeCut& cut) {
  const Drawn drawn(times_of(view), cut);
  ComparisonView shown = view;
  shown.pairs = part_of(view.pairs, cut);
  std::erase_if(shown.bias_history, [&](const BiasPoint& point) { return !drawn.has(point.at); });
  return shown;
}

std::string range_html(const std::string& path, const std::string& name, const std::string& things,
                       const std::vector<Instant>& times, const PageRange& range, const RangeCut& cut) {
  if (times.size() <= static_cast<std::size_t>(kCountSteps.front()) && !range.most && !range.from) return {};
  std::string words = "Drawn are ";
  if (cut.count == 0)
    words = "There are no " + things + " from " + time_words(range.from.value_or(Instant{})) + " on.";
  else if (cut.count == times.size())
    words += "all " + std::to_string(times.size()) + " " + things + " that are kept at hand.";
  else
    words += std::to_string(cut.count) + " of " + std::to_string(times.size()) + " " + things + ", " +
             time_words(times[cut.first]) + " to " + time_words(times[cut.first + cut.count - 1]) + ".";
  std::string links;
  const std::size_t width = std::max<std::size_t>(cut.count, 1);
  if (cut.first > 0) {
    const std::size_t first = cut.first > width ? cut.first - width : 0;
    links += range_link(path, name, width, times[first], "Earlier");
  }
  if (const std::size_t end = cut.first + cut.count; cut.count > 0 && end < times.size())
    links += range_link(path, name, width, times[end], "Later");
  for (const int step : kCountSteps)
    if (static_cast<std::size_t>(step) < times.size())
      links += range_link(path, name, static_cast<std::size_t>(step), {}, "Newest " + std::to_string(step));
  if (cut.count < times.size()) links += "<li><a href=\"" + escaped(path) + "#drawn\">All</a></li>";
  return "<p id=\"drawn\">" + flowing_html(words) + "</p><nav class=\"choice\" aria-label=\"How many " +
         escaped(things) + " are drawn\"><ul>" + links + "</ul></nav>";
}

}  // namespace agreed
