#include "daemon/engine/present_engine.hpp"

#include <utility>

namespace agreed {

std::shared_ptr<Engine> PresentEngine::get() const {
  const std::lock_guard lock(mutex_);
  return engine_;
}

void PresentEngine::replace(std::shared_ptr<Engine> engine) {
  const std::lock_guard lock(mutex_);
  engine_.swap(engine);
}

std::future<AskAnswer> PresentEngine::acknowledge(std::int64_t alert, std::string by, std::string note) {
  return get()->acknowledge(alert, std::move(by), std::move(note));
}

std::future<AskAnswer> PresentEngine::resend(std::string message) {
  return get()->resend(std::move(message));
}

std::future<AskAnswer> PresentEngine::intervene(ToldIntervention told) {
  return get()->intervene(std::move(told));
}

}  // namespace agreed
