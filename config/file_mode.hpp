#pragma once
// How the files of a drop folder come to be.

namespace agreed {

/// whole: written once, then taken away. growing: one export that the analyzer keeps appending to; it stays.
enum class FileMode { whole, growing };

}  // namespace agreed
