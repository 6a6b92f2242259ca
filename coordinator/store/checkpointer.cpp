#include "coordinator/store/checkpointer.hpp"

#include <sqlite3.h>

#include <optional>
#include <utility>

#include "coordinator/store/sqlite.hpp"

namespace holdfast::coordinator {

Checkpointer::Checkpointer(std::filesystem::path file)
    : thread_([this, file = std::move(file)] { work(file); }) {}

Checkpointer::~Checkpointer() {
  {
    const std::lock_guard lock(mutex_);
    ending_ = true;
  }
  changed_.notify_one();
  thread_.join();
}

void Checkpointer::wake() {
  {
    const std::lock_guard lock(mutex_);
    woken_ = true;
  }
  changed_.notify_one();
}

void Checkpointer::work(const std::filesystem::path& file) {
  // Opened at the first need: a store that is only looked at has no second connection.
  std::optional<Connection> connection;
  for (;;) {
    {
      std::unique_lock lock(mutex_);
      changed_.wait(lock, [this] { return woken_ || ending_; });
      if (ending_) return;
      woken_ = false;
    }
    try {
      if (!connection) {
        connection.emplace(file);
        connection->integer("PRAGMA user_version");  // a connection that has read nothing knows of no log
      }
      const std::lock_guard lock(running_);
      sqlite3_wal_checkpoint_v2(connection->handle(), "main", SQLITE_CHECKPOINT_PASSIVE, nullptr, nullptr);
    } catch (const SqliteFailure&) {
      connection.reset();
    }
  }
}

}  // namespace holdfast::coordinator
