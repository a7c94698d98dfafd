#include "daemon/render/finding_json.hpp"
