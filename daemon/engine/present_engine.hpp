#pragma once
// The engine that serves at present: a reload of the configuration puts another one in its place.
#include <memory>
#include <mutex>

#include "daemon/engine/engine.hpp"

namespace agreed {

/// What is asked while one engine has stopped and the next is not yet there is answered `unavailable`, and a
/// try to deliver is refused, to be recorded again. Thread-safe.
class PresentEngine final : public Service {
 public:
  explicit PresentEngine(std::shared_ptr<Engine> engine) : engine_(std::move(engine)) {}

  [[nodiscard]] std::shared_ptr<Engine> get() const;
  void replace(std::shared_ptr<Engine> engine);

  [[nodiscard]] std::shared_ptr<const Snapshot> snapshot() const override { return get()->snapshot(); }
  [[nodiscard]] std::filesystem::path state() const override { return get()->state(); }
  std::future<AskAnswer> acknowledge(std::int64_t alert, std::string by, std::string note) override;
  std::future<AskAnswer> resend(std::string message) override;
  std::future<AskAnswer> intervene(ToldIntervention told) override;
  /// As Engine::record.
  std::future<void> record(DeliveryTry attempt) { return get()->record(std::move(attempt)); }

 private:
  mutable std::mutex mutex_;
  std::shared_ptr<Engine> engine_;
};

}  // namespace agreed
