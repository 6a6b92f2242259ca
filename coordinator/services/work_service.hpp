// The service Work: one stream a worker, on gRPC's callback threads.
#pragma once

#include "coordinator/services/coordinator.hpp"
#include "holdfast.grpc.pb.h"

namespace holdfast::coordinator {

class WorkService final : public v1::Work::CallbackService {
 public:
  explicit WorkService(Coordinator& coordinator) : coordinator_(coordinator) {}

  grpc::ServerBidiReactor<v1::FromWorker, v1::ToWorker>* Join(grpc::CallbackServerContext* context) override;

 private:
  Coordinator& coordinator_;
};

}  // namespace holdfast::coordinator
