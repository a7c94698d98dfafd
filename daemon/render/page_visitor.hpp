#pragma once
// Who looks at the page, as far as the page shows it.
#include <string>

namespace agreed {

struct PageVisitor {
  bool signed_in = false;
  bool may_act = false;      ///< signed in with an operator's token
  std::string name;          ///< of the token, in the tokens file
  std::string form_key;      ///< what a form must carry to be taken (anti-forgery); empty: not signed in
  bool can_sign_in = false;  ///< a token is known, so signing in is possible
};

}  // namespace agreed
