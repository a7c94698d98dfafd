// The reference for /api/status: a bare server of the same HTTP library that answers with a constant of the
// size given, connections kept alive. bench_bare_server PORT BYTES; ends when its standard input does.
#include <cstdio>
#include <cstdlib>
#include <string>
#include <thread>

#include <httplib.h>

int main(int argc, char** argv) {
  if (argc != 3) return 2;
  const std::string body(static_cast<std::size_t>(std::atol(argv[2])), 'x');
  httplib::Server server;
  server.set_tcp_nodelay(true);
  server.set_keep_alive_max_count(1'000'000);
  server.new_task_queue = [] { return new httplib::ThreadPool(24); };
  server.Get("/", [&](const httplib::Request&, httplib::Response& response) {
    response.set_content(body, "application/json");
  });
  std::thread end([&] {
    while (std::getchar() != EOF) {
    }
    server.stop();
  });
  server.listen("127.0.0.1", std::atoi(argv[1]));
  end.join();
}
