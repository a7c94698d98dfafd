#pragma once
// Many simulations of a plan, side by side on the machine's processors. What each finds does not depend on
// the others, so the result is the same on one processor and on many.
#include <functional>
#include <vector>

namespace agreed::plan {

/// Tells how far a piece of work is, from 0 to 1.
using Tell = std::function<void(double share)>;
/// Does one piece; writes only what belongs to it.
using Piece = std::function<void(const Tell& tell)>;

/// Does all of them, in any order. `tell` hears how far all are, on the calling thread only. What a piece
/// throws is thrown when the others have ended.
void do_all(const std::vector<Piece>& pieces, const Tell& tell);

}  // namespace agreed::plan
