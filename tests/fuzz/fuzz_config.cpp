// The configuration: either it can be used or there is an error, each with words.
#include <cstdint>
#include <cstdlib>

#include "config/config.hpp"
#include "config/describe.hpp"

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  const agreed::ConfigResult result =
      agreed::parse_config(std::string(reinterpret_cast<const char*>(data), size), "/nowhere/agreed.yaml");
  bool error = false;
  for (const agreed::ConfigProblem& problem : result.problems) {
    error = error || !problem.warning;
    if (problem.message.empty() || problem.line < 0) std::abort();
  }
  if (result.config.has_value() == error) std::abort();
  if (result.config && agreed::describe(*result.config).empty()) std::abort();
  return 0;
}
