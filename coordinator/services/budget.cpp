#include "coordinator/services/budget.hpp"

#include <tbb/task_arena.h>

#include <thread>
#include <utility>

namespace holdfast::coordinator {

struct Budget::Arena {
  // No slot is kept for callers: they only hand over.
  explicit Arena(unsigned threads) : arena(static_cast<int>(threads), 0) {}
  tbb::task_arena arena;
};

Budget::Budget(unsigned threads, unsigned most_waiting)
    : arena_(std::make_unique<Arena>(threads)), most_waiting_(most_waiting) {}

Budget::~Budget() {
  // What is in hand uses this object.
  while (in_hand_.load() > 0) std::this_thread::yield();
}

bool Budget::enqueue(std::function<void()> work) {
  if (in_hand_.fetch_add(1) >= most_waiting_) {
    --in_hand_;
    return false;
  }
  // Isolated: while one request waits for its tiles, its thread takes no other request in between.
  arena_->arena.enqueue([this, work = std::move(work)] {
    tbb::this_task_arena::isolate(work);
    --in_hand_;
  });
  return true;
}

}  // namespace holdfast::coordinator
