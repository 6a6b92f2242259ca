#include "coordinator/services/studies_service.hpp"

#include <memory>
#include <mutex>
#include <optional>
#include <utility>

namespace holdfast::coordinator {
namespace {

grpc::Status busy() {
  return {grpc::StatusCode::RESOURCE_EXHAUSTED, "too many requests wait already"};
}

using WriteReactor = grpc::ServerWriteReactor<v1::Progress>;

/// Sends the latest news whenever the line is free: a slow reader misses some, never the last.
class FollowerOfStream final : public Follower {
 public:
  explicit FollowerOfStream(WriteReactor* stream) : stream_(stream) {}

  void tell(const v1::Progress& progress) override {
    {
      const std::lock_guard lock(mutex_);
      if (end_) return;
      news_ = progress;
      if (progress.state() != nameOf(StudyState::running)) end_ = grpc::Status::OK;
    }
    next(Event::told);
  }

  void finish(grpc::Status status) {
    {
      const std::lock_guard lock(mutex_);
      news_.reset();
      end_ = std::move(status);
    }
    next(Event::told);
  }

  void written() { next(Event::written); }

 private:
  enum class Event { told, written };

  /// As with a worker's stream: nothing is started under the lock, Finish waits for the write under way.
  void next(Event event) {
    std::optional<grpc::Status> finish;
    {
      const std::lock_guard lock(mutex_);
      if (event == Event::written) busy_ = false;
      if (busy_ || finished_) return;
      if (news_) {
        busy_ = true;
        sending_ = std::move(*news_);
        news_.reset();
      } else if (end_) {
        finished_ = true;
        finish = *end_;
      } else {
        return;
      }
    }
    if (finish)
      stream_->Finish(*finish);
    else
      stream_->StartWrite(&sending_);
  }

  WriteReactor* stream_;
  std::mutex mutex_;
  std::optional<v1::Progress> news_;
  v1::Progress sending_;
  std::optional<grpc::Status> end_;
  bool busy_ = false;
  bool finished_ = false;
};

class FollowReactor final : public WriteReactor {
 public:
  FollowReactor(Coordinator& coordinator, const std::string& name)
      : follower_(std::make_shared<FollowerOfStream>(this)) {
    if (grpc::Status status = coordinator.follow(name, follower_); !status.ok())
      follower_->finish(std::move(status));
  }

  void OnWriteDone(bool ok) override {
    if (!ok) follower_->finish(grpc::Status::CANCELLED);
    follower_->written();
  }
  void OnCancel() override { follower_->finish(grpc::Status::CANCELLED); }
  void OnDone() override { delete this; }

 private:
  std::shared_ptr<FollowerOfStream> follower_;
};

}  // namespace

grpc::ServerUnaryReactor* StudiesService::Submit(grpc::CallbackServerContext* context,
                                                 const v1::SubmitRequest* request, v1::SubmitReply* reply) {
  grpc::ServerUnaryReactor* reactor = context->DefaultReactor();
  // Reading a study builds its candidates, and the store is waited for.
  if (!budget_.enqueue(
          [this, request, reply, reactor] { reactor->Finish(coordinator_.submit(*request, *reply)); }))
    reactor->Finish(busy());
  return reactor;
}

WriteReactor* StudiesService::Follow(grpc::CallbackServerContext* /*context*/,
                                     const v1::FollowRequest* request) {
  return new FollowReactor(coordinator_, request->name());
}

grpc::ServerUnaryReactor* StudiesService::Cancel(grpc::CallbackServerContext* context,
                                                 const v1::CancelRequest* request, v1::CancelReply* reply) {
  grpc::ServerUnaryReactor* reactor = context->DefaultReactor();
  if (!budget_.enqueue(
          [this, request, reply, reactor] { reactor->Finish(coordinator_.cancel(request->name(), *reply)); }))
    reactor->Finish(busy());
  return reactor;
}

grpc::ServerUnaryReactor* StudiesService::List(grpc::CallbackServerContext* context,
                                               const v1::ListRequest* /*request*/, v1::ListReply* reply) {
  grpc::ServerUnaryReactor* reactor = context->DefaultReactor();
  for (v1::Progress& progress : coordinator_.list()) *reply->add_studies() = std::move(progress);
  reactor->Finish(grpc::Status::OK);
  return reactor;
}

}  // namespace holdfast::coordinator
