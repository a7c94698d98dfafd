#pragma once
// A comma-separated table of numbers under one line of names.
#include <fstream>
#include <sstream>
#include <string>
#include <vector>

#include <doctest/doctest.h>

namespace agreed::test {

inline std::vector<std::vector<double>> table(const std::string& name) {
  std::ifstream file(std::string(AGREED_TEST_DATA) + "/chart/" + name);
  REQUIRE(file);
  std::string line;
  std::getline(file, line);
  std::vector<std::vector<double>> rows;
  while (std::getline(file, line)) {
    std::istringstream cells(line);
    std::vector<double> row;
    for (std::string cell; std::getline(cells, cell, ',');) row.push_back(std::stod(cell));
    rows.push_back(row);
  }
  REQUIRE(rows.size() > 1);
  return rows;
}

}  // namespace agreed::test
