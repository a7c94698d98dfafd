#pragma once
// The description of the API (OpenAPI 3.1), built into the program from openapi.json.
#include <string>

namespace agreed {

[[nodiscard]] const std::string& openapi_document();

}  // namespace agreed
