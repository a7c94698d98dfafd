#include "core/alert/alert.hpp"

namespace agreed {

const char* to_string(AlertState state) {
  switch (state) {
    case AlertState::open:
      return "open";
    case AlertState::acknowledged:
      return "acknowledged";
    case AlertState::resolved:
      return "resolved";
  }
  return "";
}

const char* to_string(AlertChange change) {
  switch (change) {
    case AlertChange::opened:
      return "opened";
    case AlertChange::changed:
      return "changed";
    case AlertChange::acknowledged:
      return "acknowledged";
    case AlertChange::resolved:
      return "resolved";
    case AlertChange::reminder:
      return "reminder";
  }
  return "";
}

std::optional<AlertState> alert_state_from(std::string_view name) {
  for (const AlertState state : {AlertState::open, AlertState::acknowledged, AlertState::resolved})
    if (name == to_string(state)) return state;
  return std::nullopt;
}

}  // namespace agreed
