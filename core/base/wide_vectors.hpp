#pragma once
// For loops over all splits, element by element: a second version of the function in the wider vectors of
// processors that have them, chosen at start. Every element is the same to the last bit (no sums, no fused
// multiply-add). The choice is made before ThreadSanitizer is ready for it.
#if defined(__x86_64__) && !defined(__SANITIZE_THREAD__)
#define AGREED_WIDE_VECTORS [[gnu::target_clones("avx2", "default")]]
#else
#define AGREED_WIDE_VECTORS
#endif
