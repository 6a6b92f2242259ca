#include "coordinator/program/signals.hpp"

#include <atomic>
#include <csignal>

namespace holdfast::coordinator {
namespace {

std::atomic<int> counted{0};
static_assert(std::atomic<int>::is_always_lock_free);

void count(int /*signal*/) {
  ++counted;
}

}  // namespace

void countSignals() {
  struct sigaction action {};
  action.sa_handler = count;
  sigemptyset(&action.sa_mask);
  action.sa_flags = SA_RESTART;
  sigaction(SIGINT, &action, nullptr);
  sigaction(SIGTERM, &action, nullptr);
}

int signalsCounted() {
  return counted.load();
}

}  // namespace holdfast::coordinator
