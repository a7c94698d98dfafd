// Writes the manual pages into a folder, while the service is built:
//   agreed_manual FOLDER DATE EXAMPLE.yaml
#include <cstdio>
#include <exception>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <stdexcept>
#include <string>
#include <vector>

#include "daemon/cli/command_help.hpp"
#include "daemon/manual/command_page.hpp"
#include "daemon/manual/settings_page.hpp"
#include "daemon/version.hpp"

namespace {

std::string content(const std::filesystem::path& file) {
  std::ifstream in(file, std::ios::binary);
  if (!in) throw std::runtime_error("cannot read " + file.string());
  return {std::istreambuf_iterator<char>(in), {}};
}

void write_page(const std::filesystem::path& file, const std::string& page) {
  std::ofstream out(file, std::ios::binary);
  out << page;
  out.close();
  if (!out) throw std::runtime_error("cannot write " + file.string());
}

}  // namespace

int main(int argc, char** argv) {
  try {
    const std::vector<std::string> arguments(argv + 1, argv + argc);
    if (arguments.size() != 3) throw std::runtime_error("usage: agreed_manual FOLDER DATE EXAMPLE.yaml");
    const std::filesystem::path folder = arguments[0];
    std::filesystem::create_directories(folder);
    write_page(folder / "agreed.1",
               agreed::manual::command_page(agreed::command_help(), arguments[1], agreed::version()));
    write_page(folder / "agreed.yaml.5",
               agreed::manual::settings_page(content(arguments[2]), arguments[1], agreed::version()));
    return 0;
  } catch (const std::exception& error) {
    std::fprintf(stderr, "agreed_manual: %s\n", error.what());
    return 1;
  }
}
