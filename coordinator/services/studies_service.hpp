// The service Studies: submit, follow, cancel, list.
#pragma once

#include "coordinator/services/budget.hpp"
#include "coordinator/services/coordinator.hpp"
#include "holdfast.grpc.pb.h"

namespace holdfast::coordinator {

class StudiesService final : public v1::Studies::CallbackService {
 public:
  StudiesService(Coordinator& coordinator, Budget& budget) : coordinator_(coordinator), budget_(budget) {}

  grpc::ServerUnaryReactor* Submit(grpc::CallbackServerContext* context, const v1::SubmitRequest* request,
                                   v1::SubmitReply* reply) override;
  grpc::ServerWriteReactor<v1::Progress>* Follow(grpc::CallbackServerContext* context,
                                                 const v1::FollowRequest* request) override;
  grpc::ServerUnaryReactor* Cancel(grpc::CallbackServerContext* context, const v1::CancelRequest* request,
                                   v1::CancelReply* reply) override;
  grpc::ServerUnaryReactor* List(grpc::CallbackServerContext* context, const v1::ListRequest* request,
                                 v1::ListReply* reply) override;

 private:
  Coordinator& coordinator_;
  Budget& budget_;
};

}  // namespace holdfast::coordinator
