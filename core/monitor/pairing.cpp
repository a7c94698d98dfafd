#include "core/monitor/pairing.hpp"

#include <algorithm>
#include <tuple>

namespace agreed {
namespace {

/// The averaged results of one analyzer on one sample.
struct Half {
  Instant first{};
  double mean = 0;
  int replicates = 0;
  double squares = 0;  ///< of the replicates about their mean
};

std::vector<Half> halves_of(const std::vector<SideRow>& rows, Duration within) {
  std::vector<Half> halves;
  double sum = 0;
  for (const SideRow& row : rows) {
    if (halves.empty() || row.at - halves.back().first > within) {
      halves.push_back({row.at, row.value, 1, 0});
      sum = row.value;
      continue;
    }
    Half& half = halves.back();
    const double before = row.value - half.mean;
    sum += row.value;
    half.mean = sum / ++half.replicates;
    half.squares += before * (row.value - half.mean);
  }
  return halves;
}

Pair pair_of(const std::string& sample, const Half& x, const Half& y) {
  return {sample,   std::max(x.first, y.first), x.mean, y.mean, x.replicates, y.replicates, x.squares,
          y.squares};
}

/// A possible match: how far apart, when, and which halves.
struct Match {
  Duration apart{};
  Instant at{};
  std::size_t x = 0, y = 0;
  auto operator<=>(const Match&) const = default;
};

Duration distance(Instant a, Instant b) {
  return a < b ? b - a : a - b;
}

/// Nearest in time first; no half twice.
std::vector<Match> matches_of(const std::vector<Half>& xs, const std::vector<Half>& ys, Duration within) {
  std::vector<Match> possible;
  for (std::size_t i = 0; i < xs.size(); ++i)
    for (std::size_t j = 0; j < ys.size(); ++j)
      if (const auto apart = distance(xs[i].first, ys[j].first); apart <= within)
        possible.push_back({apart, std::max(xs[i].first, ys[j].first), i, j});
  std::sort(possible.begin(), possible.end());
  std::vector<bool> x_taken(xs.size()), y_taken(ys.size());
  std::vector<Match> matches;
  for (const Match& match : possible) {
    if (x_taken[match.x] || y_taken[match.y]) continue;
    x_taken[match.x] = y_taken[match.y] = true;
    matches.push_back(match);
  }
  return matches;
}

Instant newest_of(const SampleRows& rows) {
  Instant newest{Duration::min()};
  if (!rows.x.empty()) newest = std::max(newest, rows.x.back().at);
  if (!rows.y.empty()) newest = std::max(newest, rows.y.back().at);
  return newest;
}

}  // namespace

void SampleRows::add(bool to_x, const SideRow& row) {
  std::vector<SideRow>& side = to_x ? x : y;
  const auto place = std::upper_bound(side.begin(), side.end(), row, [](const SideRow& a, const SideRow& b) {
    return std::tie(a.at, a.replicate) < std::tie(b.at, b.replicate);
  });
  side.insert(place, row);
}

std::vector<Pair> pairs_of(const std::string& sample, const SampleRows& rows, Duration within) {
  const auto xs = halves_of(rows.x, within), ys = halves_of(rows.y, within);
  std::vector<Pair> pairs;
  for (const Match& match : matches_of(xs, ys, within))
    pairs.push_back(pair_of(sample, xs[match.x], ys[match.y]));
  std::sort(pairs.begin(), pairs.end(), [](const Pair& a, const Pair& b) { return a.at < b.at; });
  return pairs;
}

bool lacks_partner(const SampleRows& rows, bool on_x, Instant at, Duration within) {
  const auto& side = on_x ? rows.x : rows.y;
  if (std::none_of(side.begin(), side.end(), [&](const SideRow& row) { return row.at == at; })) return false;
  const auto xs = halves_of(rows.x, within), ys = halves_of(rows.y, within);
  const auto matches = matches_of(xs, ys, within);
  return std::none_of(matches.begin(), matches.end(), [&](const Match& match) {
    const Instant first = on_x ? xs[match.x].first : ys[match.y].first;
    return first <= at && at - first <= within;
  });
}

const SampleRows* SampleMemory::find(const std::string& sample) const {
  const auto found = entries_.find(sample);
  return found == entries_.end() ? nullptr : &found->second.rows;
}

void SampleMemory::put(const std::string& sample, SampleRows rows, bool paired) {
  const auto [place, is_new] = entries_.try_emplace(sample);
  if (is_new) order_.push_back(sample);
  if (is_new || !place->second.paired) waiting_ += (paired ? 0 : 1) - (is_new ? 0 : 1);
  place->second = {std::move(rows), paired};
  while (order_.size() > kCapacity) forget_oldest();
}

void SampleMemory::forget_oldest() {
  const auto oldest = entries_.find(order_.front());
  const Instant newest_row = newest_of(oldest->second.rows);
  if (!horizon_ || *horizon_ < newest_row) horizon_ = newest_row;
  if (!oldest->second.paired) --waiting_;
  entries_.erase(oldest);
  order_.pop_front();
}

bool SampleMemory::may_have_forgotten(Instant at) const {
  // A row concerns rows at most `within` away from its half's first, and those of the half it pairs with.
  return horizon_ && at - *horizon_ <= 3 * within_;
}

void SampleMemory::clear() {
  entries_.clear();
  order_.clear();
  waiting_ = 0;
  horizon_.reset();
}

}  // namespace agreed
