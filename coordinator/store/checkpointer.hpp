// Moves the write-ahead log into the store's file beside the landing: copying pages takes about as long as
// committing them, and needs no place in the writer's line.
#pragma once

#include <condition_variable>
#include <filesystem>
#include <mutex>
#include <thread>

namespace holdfast::coordinator {

/// A thread with a connection of its own. Failure is no loss: what it does not move, the writer moves later.
class Checkpointer {
 public:
  explicit Checkpointer(std::filesystem::path file);
  ~Checkpointer();
  Checkpointer(const Checkpointer&) = delete;
  Checkpointer& operator=(const Checkpointer&) = delete;

  /// Much has been committed since the last time. Does not wait.
  void wake();

  /// While the caller keeps it no checkpoint runs here: SQLite refuses a second one at the same time.
  std::unique_lock<std::mutex> holdOff() { return std::unique_lock(running_); }

 private:
  void work(const std::filesystem::path& file);

  std::mutex running_;  ///< held while a checkpoint runs
  std::mutex mutex_;    ///< of the two below
  std::condition_variable changed_;
  bool woken_ = false, ending_ = false;
  std::thread thread_;
};

}  // namespace holdfast::coordinator
