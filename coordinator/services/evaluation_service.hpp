// The service Evaluation: states in, values and partials out.
#pragma once

#include "coordinator/services/budget.hpp"
#include "coordinator/services/candidate_cache.hpp"
#include "holdfast.grpc.pb.h"

namespace holdfast::coordinator {

class EvaluationService final : public v1::Evaluation::CallbackService {
 public:
  EvaluationService(CandidateCache& candidates, Budget& budget) : candidates_(candidates), budget_(budget) {}

  grpc::ServerUnaryReactor* Evaluate(grpc::CallbackServerContext* context, const v1::EvaluateRequest* request,
                                     v1::EvaluateReply* reply) override;
  grpc::ServerBidiReactor<v1::EvaluateRequest, v1::EvaluateReply>* EvaluateStream(
      grpc::CallbackServerContext* context) override;

 private:
  CandidateCache& candidates_;
  Budget& budget_;
};

}  // namespace holdfast::coordinator
