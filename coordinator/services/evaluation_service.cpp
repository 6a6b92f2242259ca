#include "coordinator/services/evaluation_service.hpp"

#include <utility>

#include "coordinator/services/evaluate_request.hpp"

namespace holdfast::coordinator {
namespace {

grpc::Status busy() {
  return {grpc::StatusCode::RESOURCE_EXHAUSTED, "too many requests wait already"};
}

/// Reads, computes, writes, in turn: answers come in order and a stream has one request in hand at most.
class StreamReactor final : public grpc::ServerBidiReactor<v1::EvaluateRequest, v1::EvaluateReply> {
 public:
  StreamReactor(CandidateCache& candidates, Budget& budget) : candidates_(candidates), budget_(budget) {
    StartRead(&request_);
  }

  void OnReadDone(bool ok) override {
    if (!ok) {
      Finish(grpc::Status::OK);
      return;
    }
    if (!budget_.enqueue([this] { answer(); })) Finish(busy());
  }

  void OnWriteDone(bool ok) override {
    if (ok)
      StartRead(&request_);
    else
      Finish(grpc::Status::CANCELLED);
  }

  void OnDone() override { delete this; }

 private:
  void answer() {
    auto answered = evaluateRequest(request_, candidates_);
    if (answered.ok()) {
      reply_ = std::move(*answered);
    } else {
      reply_.Clear();
      reply_.set_error(answered.error().message);
    }
    StartWrite(&reply_);
  }

  CandidateCache& candidates_;
  Budget& budget_;
  v1::EvaluateRequest request_;
  v1::EvaluateReply reply_;
};

}  // namespace

grpc::ServerUnaryReactor* EvaluationService::Evaluate(grpc::CallbackServerContext* context,
                                                      const v1::EvaluateRequest* request,
                                                      v1::EvaluateReply* reply) {
  grpc::ServerUnaryReactor* reactor = context->DefaultReactor();
  const bool taken = budget_.enqueue([this, request, reply, reactor] {
    auto answered = evaluateRequest(*request, candidates_);
    if (answered.ok()) {
      *reply = std::move(*answered);
      reactor->Finish(grpc::Status::OK);
    } else {
      reactor->Finish({grpc::StatusCode::INVALID_ARGUMENT, answered.error().message});
    }
  });
  if (!taken) reactor->Finish(busy());
  return reactor;
}

grpc::ServerBidiReactor<v1::EvaluateRequest, v1::EvaluateReply>* EvaluationService::EvaluateStream(
    grpc::CallbackServerContext* /*context*/) {
  return new StreamReactor(candidates_, budget_);
}

}  // namespace holdfast::coordinator
