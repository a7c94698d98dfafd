#pragma once
// A read-only connection to a journal that may be used. Private to daemon/journal.
#include <memory>
#include <optional>
#include <utility>

#include "daemon/journal/connection.hpp"
#include "daemon/journal/journal.hpp"
#include "daemon/journal/schema.hpp"

namespace agreed {

struct JournalReader::Impl {
  explicit Impl(std::filesystem::path database_file)
      : file(std::move(database_file)), database(journal::open_reader(file)) {
    journal::check_usable(*database, file);
  }

  std::filesystem::path file;
  std::unique_ptr<SQLite::Database> database;
  std::optional<SQLite::Statement> next_message;  ///< kept: the senders ask again and again
};

}  // namespace agreed
