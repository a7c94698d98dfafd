#include "daemon/webhook/signature.hpp"

#include <random>
#include <stdexcept>

#include <doctest/doctest.h>
#include <openssl/evp.h>

using namespace agreed;

namespace {

/// HMAC-SHA256 from its definition (RFC 2104) over a plain digest: none of the code under test.
std::string verify_by_hand(const std::string& key_bytes, const std::string& text) {
  const auto sha256 = [](const std::string& input) {
    std::string digest(32, '\0');
    unsigned int length = 0;
    EVP_Digest(input.data(), input.size(), reinterpret_cast<unsigned char*>(digest.data()), &length,
               EVP_sha256(), nullptr);
    return digest;
  };
  std::string key = key_bytes.size() > 64 ? sha256(key_bytes) : key_bytes;
  key.resize(64, '\0');
  std::string inner, outer;
  for (const char byte : key) {
    inner += static_cast<char>(byte ^ 0x36);
    outer += static_cast<char>(byte ^ 0x5c);
  }
  return sha256(outer + sha256(inner + text));
}

std::string base64_by_hand(const std::string& bytes) {
  const std::string digits = "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/";
  std::string text;
  unsigned int bits = 0;
  int waiting = 0;
  for (const char byte : bytes) {
    bits = (bits << 8U) | static_cast<unsigned char>(byte);
    waiting += 8;
    while (waiting >= 6) {
      waiting -= 6;
      text += digits[(bits >> static_cast<unsigned>(waiting)) & 63U];
    }
  }
  if (waiting > 0) text += digits[(bits << static_cast<unsigned>(6 - waiting)) & 63U];
  while (text.size() % 4 != 0) text += '=';
  return text;
}

}  // namespace

TEST_CASE("the known answer of Standard Webhooks 1.0.0 (its reference libraries' tests)") {
  const std::vector<SigningKey> keys = {signing_key("whsec_MfKQ9r8GKYqrTwjUPD8ILPZIo2LaLaSw")};
  const Instant at{std::chrono::seconds(1614265330)};
  CHECK(webhook_timestamp(at) == "1614265330");
  CHECK(webhook_signature("msg_p5jXN8AQM9LWM0D4loKWxJek", at, R"({"test": 2432232314})", keys) ==
        "v1,g0hM9SsE+OTPJTGt/tmIKtSyZlE3uFJELVlNIOLJ1OE=");
}

TEST_CASE("an independent verifier accepts what is signed, for keys of every length") {
  std::mt19937 random(71);
  for (std::size_t length = 1; length <= 130; ++length) {
    CAPTURE(length);
    std::string key;
    for (std::size_t i = 0; i < length; ++i) key += static_cast<char>(random() & 255U);
    const std::string body = "{\"n\":" + std::to_string(random()) + "}";
    const std::vector<SigningKey> keys = {signing_key("whsec_" + base64_by_hand(key))};
    REQUIRE(keys.front().bytes == key);
    const Instant at{std::chrono::milliseconds(1770271200999)};
    CHECK(webhook_signature("msg_1", at, body, keys) ==
          "v1," + base64_by_hand(verify_by_hand(key, "msg_1.1770271200." + body)));
  }
}

TEST_CASE("during a rotation both secrets sign, the new one first; without any there is no signature") {
  const std::vector<SigningKey> both = {signing_key("new"), signing_key("old")};
  const Instant at{};
  const std::string header = webhook_signature("m", at, "b", both);
  CHECK(header == webhook_signature("m", at, "b", std::vector{both[0]}) + " " +
                      webhook_signature("m", at, "b", std::vector{both[1]}));
  CHECK(webhook_signature("m", at, "b", {}) == "");
}

TEST_CASE("a secret without the prefix is its bytes as they are; a bad one is refused without being shown") {
  CHECK(signing_key("c2VjcmV0").bytes == "c2VjcmV0");
  CHECK(signing_key("whsec_c2VjcmV0").bytes == "secret");
  CHECK(signing_key("whsec_c2VjcmU=").bytes == "secre");
  CHECK(signing_key("whsec_c2VjcgA=").bytes == std::string("secr\0", 5));
  for (const char* bad :
       {"", "whsec_", "whsec_c2Vj!mV0", "whsec_c2VjcmV", "whsec_====", "whsec_c2V=cmV0", "whsec_c2VjcmV0 "}) {
    CAPTURE(bad);
    try {
      (void)signing_key(bad);
      FAIL("was accepted");
    } catch (const std::invalid_argument& error) {
      CHECK(std::string(error.what()).find("c2V") == std::string::npos);
    }
  }
}

TEST_CASE("an id that would make the signed text ambiguous is refused") {
  CHECK_THROWS_AS((void)webhook_signature("a.b", {}, "", {}), std::invalid_argument);
  CHECK_THROWS_AS((void)webhook_signature("", {}, "", {}), std::invalid_argument);
}
