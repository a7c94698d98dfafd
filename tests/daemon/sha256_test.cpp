#include "daemon/sha256.hpp"

#include <doctest/doctest.h>

using namespace agreed;

// FIPS 180-2 appendix B.1.
TEST_CASE("the hash of a stream and of a text is SHA-256") {
  const char* const of_abc = "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad";
  Sha256 hash;
  hash.update("ab");
  hash.update("c");
  CHECK(hash.hex() == of_abc);
  CHECK(sha256_hex("abc") == of_abc);
}

TEST_CASE("a hash forgets a stream that was ended or given up") {
  Sha256 hash;
  hash.update("a batch that was rolled back");
  hash.start_over();
  hash.update("abc");
  CHECK(hash.hex() == sha256_hex("abc"));
  CHECK(hash.hex() == sha256_hex(""));
}
