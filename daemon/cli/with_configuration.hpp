#pragma once
// What every command does that works with a configuration and is not the service.
#include <filesystem>
#include <functional>
#include <stdexcept>

#include "config/config.hpp"

namespace agreed {

/// A command was given what it cannot use; what() is for people.
class WrongUse : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

/// Does `work`; its exit status is that of the command. What it throws is told on the standard error output,
/// with `json` also as {"error": ...} on the standard output: WrongUse is kWrongUse, all else kCouldNotDoIt.
int telling_errors(bool json, const std::function<int()>& work);

/// Reads the configuration and does `work` with it; its exit status is that of the command. A wrong
/// configuration is told on the standard error output (kWrongUse), what `work` throws as by telling_errors.
int with_configuration(const std::filesystem::path& file, bool json,
                       const std::function<int(const Config&)>& work);

}  // namespace agreed
