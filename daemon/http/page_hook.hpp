#pragma once
// What the HTTP side asks the pages for, and what it gets.
#include <functional>
#include <optional>
#include <string>

#include "core/base/instant.hpp"
#include "daemon/render/page_visitor.hpp"

namespace agreed {

struct PageAsk {
  std::string path;   ///< decoded, nothing in it leads out
  std::string query;  ///< as sent
  PageVisitor visitor{};
  std::string notice{};  ///< what became of a form, to be shown first
};

/// A document of the status page, or a file that belongs to it.
struct Page {
  int status = 200;
  std::string content_type;
  std::string body;
  std::string etag{};                   ///< empty: made of the body
  std::optional<Instant> renewed_at{};  ///< when the figures in it were made
};

/// Gives a page; nothing if there is none. Called from several threads at once.
using PageHook = std::function<std::optional<Page>(const PageAsk&)>;

}  // namespace agreed
