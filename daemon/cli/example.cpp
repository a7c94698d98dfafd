#include "daemon/cli/example.hpp"

#include <array>
#include <fstream>
#include <random>
#include <string>

#include <fmt/format.h>

#include "core/base/rfc3339.hpp"
#include "daemon/cli/example_config.hpp"
#include "daemon/clock.hpp"
#include "daemon/exit_codes.hpp"

namespace agreed {
namespace {

using namespace std::chrono_literals;
namespace fs = std::filesystem;

struct Product {
  const char* measurand;
  double low, high;    ///< what the two check standards hold
  double least, most;  ///< what the flour holds
};
constexpr std::array<Product, 2> kProducts = {
    {{"protein", 10.62, 13.41, 10.0, 13.6}, {"moisture", 13.1, 14.9, 12.8, 15.2}}};

/// One analyzer's day: check standards each shift, a split sample every two hours. The product's numbers are
/// drawn alike for both analyzers, so that they measure the same samples.
std::string day(Instant first, double offset, unsigned seed) {
  std::string text = "kind,measured_at,measurand,item,value\n";
  std::mt19937 product(1), noise(seed);
  // Not std::normal_distribution: its numbers differ between libraries, and an example should be the same
  // everywhere.
  const auto uniform = [](std::mt19937& random) { return static_cast<double>(random()) / 4294967296.0; };
  const auto error = [&] { return 0.02 * (uniform(noise) + uniform(noise) + uniform(noise) - 1.5) * 2; };
  const auto row = [&](const char* kind, Instant at, const char* measurand, const std::string& item,
                       double truth) {
    text +=
        fmt::format("{},{},{},{},{:.3f}\n", kind, to_rfc3339(at), measurand, item, truth + offset + error());
  };
  for (int hour = 0; hour < 24; hour += 2) {
    const Instant at = first + std::chrono::hours(hour);
    for (const Product& of : kProducts) {
      if (hour % 8 == 0) {
        row("check", at, of.measurand, "wheat-low", of.low);
        row("check", at, of.measurand, "wheat-high", of.high);
      }
      row("split", at + 10min, of.measurand, fmt::format("S-{:03d}", hour / 2 + 1),
          of.least + (of.most - of.least) * uniform(product));
    }
  }
  return text;
}

void write(const fs::path& file, const std::string& text) {
  std::ofstream out(file, std::ios::binary);
  out << text;
  out.close();
  if (!out) throw std::runtime_error("cannot write " + file.string());
}

}  // namespace

int write_example(const fs::path& folder) {
  if (fs::exists(folder) && (!fs::is_directory(folder) || !fs::is_empty(folder))) {
    fmt::print(stderr, "agreed: {} is there already and not an empty folder; nothing was written\n",
               folder.string());
    return kCouldNotDoIt;
  }
  const Instant first = std::chrono::floor<std::chrono::hours>(now_utc()) - 24h;
  fs::create_directories(folder / "drop" / "line1");
  fs::create_directories(folder / "drop" / "line2");
  write(folder / "agreed.yaml", kExampleConfig);
  write(folder / "drop" / "line1" / "day.csv", day(first, 0.0, 11));
  write(folder / "drop" / "line2" / "day.csv", day(first, 0.01, 12));
  fmt::print("written: {0}/agreed.yaml and a day's files in {0}/drop\nnext:    agreed run {0}/agreed.yaml\n",
             folder.string());
  return kDone;
}

}  // namespace agreed
