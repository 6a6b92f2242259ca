// Threads for what clients ask to be computed, so that it takes none from the streams of the workers.
#pragma once

#include <atomic>
#include <functional>
#include <memory>

namespace holdfast::coordinator {

class Budget {
 public:
  /// `most_waiting`: requests in hand beyond which no more are taken.
  Budget(unsigned threads, unsigned most_waiting);
  ~Budget();
  Budget(const Budget&) = delete;
  Budget& operator=(const Budget&) = delete;

  /// Runs `work` on a thread of the budget, soon. False: too much waits already; `work` is not run.
  [[nodiscard]] bool enqueue(std::function<void()> work);

 private:
  struct Arena;
  std::unique_ptr<Arena> arena_;
  std::atomic<unsigned> in_hand_{0};
  unsigned most_waiting_;
};

}  // namespace holdfast::coordinator
