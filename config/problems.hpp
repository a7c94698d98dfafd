#pragma once
// Collects what is wrong, all of it, so that one reading of the file names every error.
#include <string>
#include <vector>

#include "config/config.hpp"
#include "config/node.hpp"

namespace agreed::settings_file {

class Problems {
 public:
  void error(Position at, std::string key, std::string message);
  void warning(Position at, std::string key, std::string message);

  [[nodiscard]] bool any_error() const { return errors_ > 0; }
  /// By position; at most 500, the last then says how many more there are.
  [[nodiscard]] std::vector<ConfigProblem> sorted() const;

 private:
  std::vector<ConfigProblem> list_;
  std::size_t errors_ = 0;
};

}  // namespace agreed::settings_file
