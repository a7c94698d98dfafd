#include "daemon/cli/journal_commands.hpp"

#include <filesystem>
#include <string>

#include <fmt/format.h>
#include <nlohmann/json.hpp>

#include "config/config.hpp"
#include "daemon/cli/print_json.hpp"
#include "daemon/cli/with_configuration.hpp"
#include "daemon/exit_codes.hpp"
#include "daemon/journal/backup.hpp"
#include "daemon/journal/verify.hpp"

namespace agreed {
namespace {

namespace fs = std::filesystem;
using Json = nlohmann::ordered_json;

std::string in_words(const ChainHead& head) {
  return std::to_string(head.sequence) + ":" + head.sha256;
}

Json to_json(const ChainHead& head) {
  return {{"sequence", head.sequence}, {"sha256", head.sha256}};
}

Json to_json(const JournalProof& proof, const fs::path& file) {
  Json not_found = Json::array();
  for (const ChainHead& head : proof.not_found) not_found.push_back(to_json(head));
  return {{"proven", proof.faults.empty()}, {"file", file.string()},
          {"batches", proof.batches},       {"rows", proof.rows},
          {"chain", to_json(proof.head)},   {"heads_not_found", not_found},
          {"faults", proof.faults}};
}

void print_proof(const JournalProof& proof, const fs::path& file) {
  fmt::print("journal  {}\n", file.string());
  if (proof.faults.empty())
    fmt::print("proven   {} batches with {} rows: nothing was changed and nothing is missing\n",
               proof.batches, proof.rows);
  else
    fmt::print("NOT as it was written: {}\n",
               proof.faults.size() == 1 ? "1 fault" : "faults, the first of them below");
  for (const std::string& fault : proof.faults) fmt::print("fault    {}\n", fault);
  fmt::print("head     {}\n", in_words(proof.head));
}

/// Nothing is created by looking: a journal that is not there is said to be missing.
void must_exist(const fs::path& file) {
  if (!fs::exists(file)) throw JournalError("There is no journal " + file.string() + ".", false);
}

void say_backup(const JournalProof& proof, const fs::path& target) {
  print_proof(proof, target);
  if (proof.faults.empty())
    fmt::print("written  {}\n", target.string());
  else
    fmt::print("written  {}, with the faults of the journal it is a copy of\n", target.string());
}

void say_restored(const Restored& restored, const fs::path& state, const fs::path& backup) {
  print_proof(restored.proof, backup);
  if (!restored.proof.faults.empty()) {
    fmt::print("nothing was restored: the journal is as it was. Name another backup.\n");
    return;
  }
  fmt::print("restored {}\n", database_of(state).string());
  if (restored.kept.empty())
    fmt::print("kept     nothing: there was no journal\n");
  else
    fmt::print("kept     {} (what was there)\n", restored.kept.string());
  fmt::print(
      "Results taken in after the backup are not in this journal; their files lie in done/ of the inboxes. "
      "Move\n"
      "them back into the inbox to take them in again: rows that are known count once. Messages that waited "
      "when\n"
      "the backup was made are sent, perhaps a second time, under the same ids.\n");
}

}  // namespace

int verify_command(const VerifyCommand& command) {
  return with_configuration(command.config, command.json, [&](const Config& config) {
    const fs::path file = command.file ? *command.file : database_of(config.state);
    must_exist(file);
    const JournalProof proof = verify_database(file, command.heads);
    if (command.json)
      print_json(to_json(proof, file));
    else
      print_proof(proof, file);
    return proof.faults.empty() ? kDone : kAnswerIsNo;
  });
}

int backup_command(const BackupCommand& command) {
  return with_configuration(command.config, command.json, [&](const Config& config) {
    must_exist(database_of(config.state));
    const JournalProof proof = backup_journal(config.state, command.file);
    if (command.json)
      print_json(to_json(proof, command.file));
    else
      say_backup(proof, command.file);
    return proof.faults.empty() ? kDone : kAnswerIsNo;
  });
}

int restore_command(const RestoreCommand& command) {
  return with_configuration(command.config, command.json, [&](const Config& config) {
    const Restored restored = restore_journal(config.state, command.file);
    if (command.json) {
      Json answer = to_json(restored.proof, command.file);
      answer["restored"] = restored.proof.faults.empty();
      answer["kept"] = restored.kept.empty() ? Json() : Json(restored.kept.string());
      print_json(answer);
    } else {
      say_restored(restored, config.state, command.file);
    }
    return restored.proof.faults.empty() ? kDone : kAnswerIsNo;
  });
}

}  // namespace agreed
