// Writes the page for invented states of Harrow Mill into a folder, to be looked at with a browser:
//   page_preview FOLDER
#include <cstdio>
#include <filesystem>
#include <fstream>

#include "daemon/render/page.hpp"
#include "page_mill.hpp"

namespace {

void write(const std::filesystem::path& file, const agreed::mill::Story& story, const std::string& path,
           agreed::Duration late = {}) {
  const auto answer = agreed::mill::ask(story, path, {}, late);
  if (!answer) {
    std::fprintf(stderr, "no page for %s\n", path.c_str());
    return;
  }
  std::ofstream(file) << answer->body;
  std::printf("%8zu bytes %s\n", answer->body.size(), file.c_str());
}

}  // namespace

int main(int count, char** words) {
  if (count != 2) {
    std::fprintf(stderr, "usage: page_preview FOLDER\n");
    return 2;
  }
  using namespace agreed;
  const std::filesystem::path folder = words[1];
  std::filesystem::create_directories(folder);
  write(folder / "page.css", mill::empty(), "/page.css");
  write(folder / "page.js", mill::empty(), "/page.js");
  write(folder / "agreeing.html", mill::agreeing(), "/");
  write(folder / "agreeing-protein.html", mill::agreeing(), "/comparisons/protein");
  write(folder / "drifting.html", mill::drifting(), "/");
  write(folder / "drifting-protein.html", mill::drifting(), "/comparisons/protein");
  write(folder / "drifting-chart.html", mill::drifting(), "/charts/line2/wheat-high/protein");
  write(folder / "drifting-alerts.html", mill::drifting(), "/alerts");
  write(folder / "empty.html", mill::empty(), "/");
  write(folder / "empty-protein.html", mill::empty(), "/comparisons/protein");
  write(folder / "gathering.html", mill::gathering(), "/");
  write(folder / "starting.html", mill::starting(), "/");
  write(folder / "late.html", mill::agreeing(), "/", std::chrono::minutes(7));
  write(folder / "many.html", mill::many(40), "/");
  const std::string odd = "An-unbroken-name-of-" + std::string(70, 'x') + " <b>&amp;";
  write(folder / "hostile.html", mill::hostile(odd), "/");
  return 0;
}
