#pragma once
// examples/mill.yaml, built in.

namespace agreed {

extern const char* const kExampleConfig;

}  // namespace agreed
