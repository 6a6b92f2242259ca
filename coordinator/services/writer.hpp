// The thread that owns the store. Everything that changes the store waits in one line and happens in order.
#pragma once

#include <array>
#include <atomic>
#include <condition_variable>
#include <cstddef>
#include <deque>
#include <functional>
#include <memory>
#include <mutex>
#include <span>
#include <string>
#include <thread>
#include <variant>
#include <vector>

#include "coordinator/queue/queue.hpp"
#include "coordinator/store/store.hpp"
#include "holdfast.pb.h"
#include "thermo/state.hpp"

namespace holdfast::coordinator {

using OutcomeCounts = std::array<std::uint64_t, thermo::kOutcomes>;

/// A checked result on its way into the store.
struct Landing {
  StudyId study = 0;
  WorkerId worker = 0;
  std::string worker_name;
  std::uint32_t attempts = 0;
  double started_unix = 0, finished_unix = 0;  ///< seconds since 1970, UTC
  std::unique_ptr<const v1::JobResult> result;
  OutcomeCounts outcomes{};
};

class Writer {
 public:
  using Landed = std::function<void(std::span<const Landing>)>;
  using Broken = std::function<void(const Error&)>;

  /// `landed` is called after COMMIT. `broken` is called once, when the store fails for good (disk full,
  /// ...): from then on nothing is written any more. Both are called on the writer's thread, without any lock
  /// held.
  Writer(Store store, Landed landed, Broken broken);
  ~Writer() { finish(); }
  Writer(const Writer&) = delete;
  Writer& operator=(const Writer&) = delete;

  void land(Landing landing);
  /// Runs `action` on the writer's thread, after all that was handed over before. An Error breaks the store.
  void run(std::function<Status(Store&)> action);
  /// The same, and waits for it. An Error is returned and breaks nothing. Not from the writer's thread.
  Status call(const std::function<Status(Store&)>& action);

  /// Does all that waits, and what that hands over in turn, then ends. For the owner, before it goes itself.
  void finish();

  /// Bytes of results handed over and not landed yet.
  std::size_t bytesWaiting() const { return bytes_waiting_.load(std::memory_order_relaxed); }

 private:
  using Action = std::function<Status(Store&)>;

  void work();
  void landBatch(std::vector<Landing> batch);
  void breakDown(const Error& error);

  Store store_;  ///< of the writer's thread alone
  Landed landed_;
  Broken broken_;
  bool is_broken_ = false;  ///< of the writer's thread alone
  std::atomic<std::size_t> bytes_waiting_{0};
  std::mutex mutex_;
  std::condition_variable changed_;
  std::deque<std::variant<Landing, Action>> line_;
  bool ending_ = false;
  std::thread thread_;
};

}  // namespace holdfast::coordinator
