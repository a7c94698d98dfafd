#include <cstdio>

#include "daemon/version.hpp"

int main() { std::printf("agreed %s\n", agreed::version()); }
