#include "coordinator/services/work_service.hpp"

#include <deque>
#include <memory>
#include <mutex>
#include <utility>

namespace holdfast::coordinator {
namespace {

using Reactor = grpc::ServerBidiReactor<v1::FromWorker, v1::ToWorker>;

/// What waits to be sent on a stream, and its orderly end. gRPC allows one write at a time and none after
/// Finish; a port may be told things by any thread, and may outlive its stream.
class StreamPort final : public WorkerPort {
 public:
  explicit StreamPort(Reactor* stream) : stream_(stream) {}

  void enqueue(v1::ToWorker message) override {
    const std::lock_guard lock(mutex_);
    if (!end_) line_.push_back(std::move(message));
  }

  void flush() override { next(Event::flushed); }
  void written() { next(Event::written); }

  /// Only the first call counts.
  void finish(const grpc::Status& status) override {
    {
      const std::lock_guard lock(mutex_);
      if (end_) return;
      end_ = status;
      line_.clear();
    }
    next(Event::flushed);
  }

 private:
  enum class Event { flushed, written };

  /// Starts the next write, or Finish, if nothing is under way. Both are started without the lock: gRPC may
  /// call back on this very thread. The stream cannot go in between: it goes after Finish only, and Finish
  /// waits for `busy_`.
  void next(Event event) {
    bool finish = false;
    {
      const std::lock_guard lock(mutex_);
      if (event == Event::written) busy_ = false;
      if (busy_ || finished_) return;
      if (end_) {
        finished_ = finish = true;
      } else if (!line_.empty()) {
        busy_ = true;
        sending_ = std::move(line_.front());
        line_.pop_front();
      } else {
        return;
      }
    }
    if (finish)
      stream_->Finish(*end_);
    else
      stream_->StartWrite(&sending_);
  }

  Reactor* stream_;
  std::mutex mutex_;
  std::deque<v1::ToWorker> line_;
  v1::ToWorker sending_;
  std::optional<grpc::Status> end_;
  bool busy_ = false;
  bool finished_ = false;
};

class JoinReactor final : public Reactor {
 public:
  explicit JoinReactor(Coordinator& coordinator)
      : coordinator_(coordinator), port_(std::make_shared<StreamPort>(this)) {
    StartRead(&incoming_);
  }

  void OnReadDone(bool ok) override {
    if (!ok) {
      leave();
      port_->finish(grpc::Status::OK);
      return;
    }
    const grpc::Status status = take();
    if (!status.ok()) {
      leave();
      port_->finish(status);
      return;
    }
    incoming_.Clear();
    StartRead(&incoming_);
  }

  void OnWriteDone(bool ok) override {
    if (!ok) port_->finish({grpc::StatusCode::CANCELLED, "the worker is gone"});
    port_->written();
  }

  void OnCancel() override {
    leave();
    port_->finish(grpc::Status::CANCELLED);
  }

  void OnDone() override {
    leave();
    delete this;
  }

 private:
  grpc::Status take() {
    if (worker_.load() != 0) return coordinator_.hear(worker_, incoming_);
    if (!incoming_.has_hello())
      return {grpc::StatusCode::INVALID_ARGUMENT, "the first message must be Hello"};
    WorkerId worker = 0;
    const grpc::Status status = coordinator_.join(incoming_.hello(), port_, worker);
    worker_ = worker;
    return status;
  }

  void leave() {
    if (const WorkerId worker = worker_.load(); worker != 0) coordinator_.leave(worker);
  }

  Coordinator& coordinator_;
  std::shared_ptr<StreamPort> port_;
  std::atomic<WorkerId> worker_{0};  ///< 0: has not joined yet
  v1::FromWorker incoming_;
};

}  // namespace

Reactor* WorkService::Join(grpc::CallbackServerContext* /*context*/) {
  return new JoinReactor(coordinator_);
}

}  // namespace holdfast::coordinator
