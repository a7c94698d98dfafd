// Signing in with a token.
#include "daemon/render/page_views.hpp"

namespace agreed {
namespace {

std::string how_to_make_one() {
  return "<p>A token is made with <code>agreed token CONFIG --role operator</code> (may read and "
         "acknowledge) or "
         "<code>--role reader</code> (may read), on the machine of the service and as its user; it is shown "
         "once. "
         "The configuration names the file of their hashes: <code>access: {tokens_file: tokens}</code>.</p>";
}

}  // namespace

PageAnswer render_sign_in(const PageInput& input, const std::string& to) {
  std::string out = "<h1>Sign in</h1>";
  if (!input.visitor.can_sign_in)
    return document(input, "Sign in",
                    out + "<p>The service knows no token yet, so nobody can sign in.</p>" + how_to_make_one(),
                    {200, false});
  out +=
      "<form class=\"sign-in\" method=\"post\" action=\"/sign-in\"><input type=\"hidden\" name=\"to\" "
      "value=\"" +
      escaped(to) +
      "\"><p><label for=\"token\">Token</label><input id=\"token\" name=\"token\" type=\"password\" required "
      "maxlength=\"200\" autocomplete=\"current-password\"></p>"
      "<p><button type=\"submit\">Sign in</button></p></form>";
  out += "<p>Signed in already, and came here by a link from elsewhere? " +
         link_html(to, "Go on to the page") + ".</p>";
  return document(input, "Sign in", out + how_to_make_one(), {input.notice.empty() ? 200 : 403, false});
}

}  // namespace agreed
