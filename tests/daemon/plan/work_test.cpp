// Pieces of work side by side: all are done once, and a failure comes out.
#include "daemon/plan/work.hpp"

#include <algorithm>
#include <stdexcept>

#include <doctest/doctest.h>

using namespace agreed::plan;

TEST_CASE("every piece is done once, and the caller hears how far all are") {
  std::vector<int> done(100);
  std::vector<Piece> pieces;
  for (int& one : done)
    pieces.emplace_back([&one](const Tell& tell) {
      tell(0.5);
      ++one;
    });
  double least = 1, most = 0;
  do_all(pieces, [&](double share) {
    least = std::min(least, share);
    most = std::max(most, share);
  });
  CHECK(std::count(done.begin(), done.end(), 1) == 100);
  CHECK(least > 0);
  CHECK(most <= 1);
  do_all({}, [](double) { FAIL("there is nothing to tell"); });
}

TEST_CASE("what a piece throws is thrown by the whole") {
  std::vector<Piece> pieces;
  for (int i = 0; i < 20; ++i)
    pieces.emplace_back([i](const Tell&) {
      if (i == 3) throw std::runtime_error("the third");
    });
  CHECK_THROWS_WITH_AS(do_all(pieces, [](double) {}), "the third", std::runtime_error);
}
