#pragma once
// What the tests of core/pair share: small files of published numbers, random pairs, a relative tolerance.
#include <algorithm>
#include <cmath>
#include <fstream>
#include <random>
#include <sstream>
#include <string>
#include <vector>

#include <doctest/doctest.h>

#include "core/pair/moments.hpp"

namespace agreed::test {

/// The rows of a comma-separated file of numbers, without comments and the line of names.
inline std::vector<std::vector<double>> read_rows(const std::string& name) {
  std::ifstream file(std::string(AGREED_TEST_DATA) + "/pair/" + name);
  REQUIRE_MESSAGE(file.good(), "missing test data: " << name);
  std::vector<std::vector<double>> rows;
  bool names_seen = false;
  for (std::string line; std::getline(file, line);) {
    if (line.empty() || line.front() == '#') continue;
    if (!names_seen) {
      names_seen = true;
      continue;
    }
    std::vector<double> row;
    std::stringstream fields(line);
    for (std::string field; std::getline(fields, field, ',');) row.push_back(std::stod(field));
    rows.push_back(row);
  }
  return rows;
}

inline std::vector<Point> read_points(const std::string& name) {
  std::vector<Point> points;
  for (const auto& row : read_rows(name)) points.push_back({row.at(0), row.at(1)});
  return points;
}

/// |a - b| within `relative` of the larger; refuses NaN.
inline bool close(double a, double b, double relative) {
  return std::abs(a - b) <= relative * std::max({1e-300, std::abs(a), std::abs(b)});
}

// A macro so that a failure names its own line and expression.
#define CHECK_CLOSE(a, b, relative)                                                                     \
  do {                                                                                                  \
    const double got = (a), want = (b);                                                                 \
    CHECK_MESSAGE(agreed::test::close(got, want, relative), #a " = ", doctest::toString(got), ", not ", \
                  doctest::toString(want), ", off by ", got - want);                                    \
  } while (false)

/// Pairs about a line: true values uniform on [low, high], errors normal.
struct Plant {
  double low = 9, high = 15, intercept = 0, slope = 1, sd_x = 0.02, sd_y = 0.02;

  Point operator()(std::mt19937_64& random) const {
    std::uniform_real_distribution<double> level(low, high);
    std::normal_distribution<double> error;
    const double truth = level(random);
    const double x = truth + sd_x * error(random);
    return {x, intercept + slope * truth + sd_y * error(random)};
  }
};

inline std::vector<Point> draw(const Plant& plant, std::size_t n, std::mt19937_64& random) {
  std::vector<Point> points;
  for (std::size_t i = 0; i < n; ++i) points.push_back(plant(random));
  return points;
}

}  // namespace agreed::test
