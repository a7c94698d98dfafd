#include "daemon/cli/reloader.hpp"

#include <future>
#include <stdexcept>

#include <doctest/doctest.h>

using namespace agreed;

TEST_CASE("a reload that fails for good is told at once, and none is made after it") {
  std::promise<void> over, failed;
  int made = 0;
  Reloader reloader(
      [&made](const std::stop_token&) {
        if (++made > 1) throw std::runtime_error("the journal is gone");
      },
      {[&over] { over.set_value(); }, [&failed] { failed.set_value(); }});
  reloader.ask();
  over.get_future().get();
  CHECK_FALSE(reloader.failure());
  reloader.ask();
  failed.get_future().get();
  CHECK(reloader.failure() == "the journal is gone");
  reloader.ask();
  reloader.stop();
  CHECK(made == 2);
}
