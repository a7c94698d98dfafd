#pragma once
// What the HTTP side may ask of the running service.
#include <filesystem>
#include <future>
#include <memory>
#include <optional>
#include <string>

#include "core/base/event.hpp"
#include "daemon/engine/snapshot.hpp"
#include "daemon/intake/told_intervention.hpp"

namespace agreed {

enum class AskOutcome { done, done_before, not_usable, not_found, not_possible, unavailable };

struct AskAnswer {
  AskOutcome outcome = AskOutcome::done;
  std::string words{};                                ///< why not; of what was done, see there
  std::string field{};                                ///< of what was asked, which part is not usable
  std::optional<JournalIntervention> intervention{};  ///< as it is stored
};

class Service {
 public:
  virtual ~Service() = default;
  [[nodiscard]] virtual std::shared_ptr<const Snapshot> snapshot() const = 0;
  /// The state folder, for a JournalReader.
  [[nodiscard]] virtual std::filesystem::path state() const = 0;
  /// Answered after COMMIT. Unknown alert: not_found; already resolved: not_possible.
  virtual std::future<AskAnswer> acknowledge(std::int64_t alert, std::string by, std::string note) = 0;
  /// Puts a delivered or undeliverable message (its webhook-id) in the outbox again; `words` of what was done
  /// name its route. Answered after COMMIT. Unknown message: not_found; it waits anyway, or its route is not
  /// configured any more: not_possible.
  virtual std::future<AskAnswer> resend(std::string message) = 0;
  /// Takes an intervention in as from a file; answered after COMMIT, when the snapshot shows its effect. A
  /// field that a file could not have: not_usable. It is known with the same `by` and `note`: done_before;
  /// with others: not_possible.
  virtual std::future<AskAnswer> intervene(ToldIntervention told) = 0;
};

}  // namespace agreed
