// Signing in at the page, its cookie, its forms and their keys.
#include "daemon/http/page_side.hpp"

#include <string>
#include <vector>

#include <doctest/doctest.h>

#include "daemon/http/problem.hpp"
#include "tests/support/temp_folder.hpp"

namespace {
using namespace agreed;
using namespace std::chrono_literals;

const std::string kOperator = "operator shift-leader " + sha256_hex("ooo") + "\n";
const std::string kReader = "reader wall " + sha256_hex("rrr") + "\n";

/// The pages, as they say who looks at them.
struct Front {
  explicit Front(bool reads_need_token = false, const std::string& tokens_text = kOperator + kReader)
      : side(
            [](const PageAsk& ask) -> std::optional<Page> {
              if (ask.path == "/none") return std::nullopt;
              const int status = ask.path == "/not-taken" || !ask.notice.empty() ? 403 : 200;
              return Page{status, "text/html",
                          ask.path + "?" + ask.query + "|" + ask.visitor.name + "|" +
                              (ask.visitor.may_act ? "acts" : "") + "|" + ask.visitor.form_key + "|" +
                              ask.notice};
            },
            tokens, reads_need_token,
            [this](const std::string& alert, const std::string& by, const std::string& note) {
              acknowledged.push_back(alert + " " + by + ": " + note);
              if (alert == "17") return HttpAnswer{};
              return problem(409, "It is resolved already.", "/api/alerts/" + alert);
            },
            [this] { return now; }) {
    write(tokens_text);
  }
  void write(const std::string& text) const { testing::write_file(file, text); }

  HttpAnswer ask(const std::string& method, const std::string& target, const std::string& body = "",
                 const std::string& accept = "text/html") {
    HttpRequest request;
    request.method = method;
    request.target = target;
    request.body = body;
    request.accept = accept;
    request.cookie = cookie;
    request.authorization = authorization;
    return side.answer(request, *take_apart(target));
  }
  HttpAnswer get(const std::string& target) { return ask("GET", target); }

  /// Signs in and keeps the cookie as a browser would.
  HttpAnswer sign_in(const std::string& token, const std::string& to = "%2Falerts") {
    HttpAnswer answer = ask("POST", "/sign-in", "token=" + token + "&to=" + to);
    for (const auto& [name, value] : answer.headers)
      if (name == "Set-Cookie") cookie = "other=1; " + value.substr(0, value.find(';'));
    return answer;
  }
  std::string form_key() {
    const std::string body = get("/").body;
    const auto end = body.rfind('|'), begin = body.rfind('|', end - 1) + 1;
    return body.substr(begin, end - begin);
  }
  HttpAnswer acknowledge(const std::string& alert, const std::string& key) {
    return ask("POST", "/alerts/" + alert + "/acknowledge",
               "form_key=" + key + "&by=M.+Fell&note=lamp+%26+mirror&back=%2Falerts%3Fstate%3Dopen");
  }

  testing::TempFolder folder;
  std::filesystem::path file = folder.path() / "tokens";
  Tokens tokens{file, [](const std::string&) {}};
  Sessions::Time now = Sessions::Time{} + 1000h;
  std::string cookie, authorization;
  std::vector<std::string> acknowledged;
  PageSide side;
};

std::string header(const HttpAnswer& answer, const std::string& name) {
  for (const auto& [key, value] : answer.headers)
    if (key == name) return value;
  return {};
}

}  // namespace

TEST_CASE("signing in gives a cookie that is not the token, and leads on to where one wanted to go") {
  Front front;
  CHECK(front.get("/").body == "/?||||");
  const HttpAnswer answer = front.sign_in("ooo");
  CHECK(answer.status == 303);
  CHECK(header(answer, "Location") == "/alerts");
  const std::string set = header(answer, "Set-Cookie");
  CHECK(set.find("; HttpOnly") != std::string::npos);
  CHECK(set.find("; SameSite=Strict") != std::string::npos);
  CHECK(set.find("; Max-Age=43200;") != std::string::npos);
  CHECK(set.find("ooo") == std::string::npos);
  CHECK(front.get("/").body.find("|shift-leader|acts|" + front.form_key()) != std::string::npos);
  CHECK(front.form_key().size() == 64);
  CHECK(set.find(front.form_key()) == std::string::npos);
  CHECK(header(front.get("/"), "Vary") == "Cookie");
}

TEST_CASE("a wrong token gives no cookie") {
  Front front;
  for (const char* token : {"wrong", "", "rrrr", "%00"}) {
    const HttpAnswer answer = front.sign_in(token);
    CHECK(answer.status == 403);
    CHECK(header(answer, "Set-Cookie").empty());
    CHECK(answer.body.find("This token is not known.") != std::string::npos);
  }
}

TEST_CASE("nobody is led to another host by a prepared link") {
  Front front;
  for (const char* to : {"%2F%2Fevil.example", "https%3A%2F%2Fevil.example", "%2F%5Cevil.example", "",
                         "%2F..%2Fx", "%2Fa%0D%0ASet-Cookie%3A+x", "%2Fa%23b"}) {
    CAPTURE(to);
    CHECK(header(front.sign_in("ooo", to), "Location") == "/");
  }
}

TEST_CASE("a form is taken with its session's key only; what became of it is told") {
  Front front;
  CHECK(header(front.acknowledge("17", ""), "Location") == "/sign-in?to=%2Falerts%3Fstate%3Dopen");
  front.sign_in("ooo");
  const std::string key = front.form_key();
  for (const std::string& wrong : {std::string(), std::string("x"), key.substr(1), std::string(64, '0')})
    CHECK(front.acknowledge("17", wrong).status == 403);
  CHECK(front.acknowledged.empty());
  const HttpAnswer done = front.acknowledge("17", key);
  CHECK(done.status == 303);
  CHECK(header(done, "Location") == "/alerts?state=open#17");
  CHECK(front.acknowledged == std::vector<std::string>{"17 M. Fell: lamp & mirror"});
  const HttpAnswer not_done = front.acknowledge("18", key);
  CHECK(not_done.status == 409);
  CHECK(not_done.body.find("It is resolved already.") != std::string::npos);
  // The key of one session is none in another.
  front.sign_in("ooo");
  CHECK(front.acknowledge("17", key).status == 403);
}

TEST_CASE("a reader may look and not act") {
  Front front;
  front.sign_in("rrr");
  const HttpAnswer answer = front.acknowledge("17", front.form_key());
  CHECK(answer.status == 403);
  CHECK(answer.body.find("operator's token") != std::string::npos);
  CHECK(front.acknowledged.empty());
}

TEST_CASE("a session ends with its time, with its token's line, and by signing out with its key") {
  Front front;
  front.sign_in("ooo");
  front.now += 12h - 1s;
  CHECK_FALSE(front.form_key().empty());
  front.now += 1s;
  CHECK(front.form_key().empty());
  front.sign_in("rrr");
  front.now += 24h * 29;
  CHECK_FALSE(front.form_key().empty());
  front.write(kOperator);
  CHECK(front.form_key().empty());
  front.write(kOperator + kReader);
  CHECK(front.form_key().empty());  // not by putting it back either
  front.sign_in("ooo");
  const std::string key = front.form_key();
  CHECK(front.ask("POST", "/sign-out", "form_key=x").status == 403);
  CHECK_FALSE(front.form_key().empty());
  const HttpAnswer out = front.ask("POST", "/sign-out", "form_key=" + key);
  CHECK(out.status == 303);
  CHECK(header(out, "Set-Cookie").find("agreed_session=; Max-Age=0") == 0);
  CHECK(front.form_key().empty());
}

TEST_CASE("where reading needs a token a browser is led to sign in and a program is refused") {
  Front front(true);
  CHECK(header(front.get("/charts/a/b/c?points=5"), "Location") ==
        "/sign-in?to=%2Fcharts%2Fa%2Fb%2Fc%3Fpoints%3D5");
  CHECK(front.ask("GET", "/", "", "*/*").status == 401);
  for (const char* open : {"/sign-in", "/page.css", "/page.js", "/page.svg"})
    CHECK(front.get(open).status == 200);
  front.authorization = "Bearer wrong";
  CHECK(front.get("/").status == 401);
  front.authorization = "Bearer rrr";
  CHECK(front.get("/").status == 200);
  front.authorization.clear();
  front.sign_in("rrr");
  CHECK(front.get("/").status == 200);
}

TEST_CASE("methods and paths that are not there") {
  Front front;
  CHECK(header(front.ask("POST", "/alerts"), "Allow") == "GET, HEAD");
  CHECK(header(front.ask("DELETE", "/sign-in"), "Allow") == "GET, HEAD, POST");
  CHECK(header(front.get("/sign-out"), "Allow") == "POST");
  CHECK(header(front.get("/alerts/17/acknowledge"), "Allow") == "POST");
  CHECK(front.ask("GET", "/none", "", "application/json").status == 404);
  CHECK(front.get("/none").content_type == "text/html");
}
