// TLS towards an endpoint: verified against an own CA file, refused without it or under another name.
#include <cstdio>
#include <filesystem>
#include <memory>
#include <thread>

#include <doctest/doctest.h>
#include <httplib.h>
#include <openssl/pem.h>
#include <openssl/x509v3.h>

#include "daemon/webhook/http_call.hpp"
#include "tests/support/temp_folder.hpp"

using namespace agreed;

namespace {

/// A certificate that signs itself, for 127.0.0.1 only, good for an hour.
class Certificate {
 public:
  Certificate() : key_(EVP_RSA_gen(2048), EVP_PKEY_free), certificate_(X509_new(), X509_free) {
    X509* x = certificate_.get();
    X509_set_version(x, 2);
    ASN1_INTEGER_set(X509_get_serialNumber(x), 1);
    X509_gmtime_adj(X509_getm_notBefore(x), -60);
    X509_gmtime_adj(X509_getm_notAfter(x), 3600);
    X509_set_pubkey(x, key_.get());
    X509_NAME* name = X509_get_subject_name(x);
    X509_NAME_add_entry_by_txt(name, "CN", MBSTRING_ASC,
                               reinterpret_cast<const unsigned char*>("Harrow Mill"), -1, -1, 0);
    X509_set_issuer_name(x, name);
    add(NID_basic_constraints, "critical,CA:TRUE");
    add(NID_subject_alt_name, "IP:127.0.0.1");
    X509_sign(x, key_.get(), EVP_sha256());
    std::FILE* out = std::fopen(file_.c_str(), "w");
    PEM_write_X509(out, x);
    std::fclose(out);
  }
  [[nodiscard]] X509* certificate() const { return certificate_.get(); }
  [[nodiscard]] EVP_PKEY* key() const { return key_.get(); }
  [[nodiscard]] const std::filesystem::path& file() const { return file_; }

 private:
  void add(int kind, const char* value) {
    X509_EXTENSION* extension = X509V3_EXT_conf_nid(nullptr, nullptr, kind, value);
    X509_add_ext(certificate_.get(), extension, -1);
    X509_EXTENSION_free(extension);
  }

  std::unique_ptr<EVP_PKEY, decltype(&EVP_PKEY_free)> key_;
  std::unique_ptr<X509, decltype(&X509_free)> certificate_;
  testing::TempFolder folder_;
  std::filesystem::path file_ = folder_.path() / "ca.pem";
};

}  // namespace

TEST_CASE("an endpoint's certificate must be signed by the CA given and name the host") {
  const Certificate ours;
  httplib::SSLServer server(ours.certificate(), ours.key());
  REQUIRE(server.is_valid());
  int posts = 0;
  server.Post("/hook", [&](const httplib::Request&, httplib::Response&) { ++posts; });
  server.set_keep_alive_max_count(1);
  const int port = server.bind_to_any_port("127.0.0.1");
  std::thread serving([&] { server.listen_after_bind(); });
  while (!server.is_running()) std::this_thread::yield();

  CallRequest request;
  request.content_type = "application/json";
  request.body = "{}";
  const auto post_to = [&](const std::string& host) {
    request.url = "https://" + host + ":" + std::to_string(port) + "/hook";
    return http_call(request, {}, {});
  };
  const auto unknown_ca = post_to("127.0.0.1");
  CHECK(unknown_ca.status == 0);
  CHECK(unknown_ca.error == "the endpoint's certificate could not be verified");
  request.ca_file = ours.file();
  const auto verified = post_to("127.0.0.1");
  CHECK(verified.status == 200);
  CHECK(verified.error.empty());
  const auto other_name = post_to("localhost");
  CHECK(other_name.status == 0);
  request.ca_file = "/nonexistent/ca.pem";
  CHECK(post_to("127.0.0.1").error == "the certificates of the CA file could not be loaded");

  server.stop();
  serving.join();
  CHECK(posts == 1);
}
