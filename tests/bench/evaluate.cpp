// Evaluate against an empty echo, both unary over TCP loopback from one client, in the same run. Goal: the
// median of Evaluate at most twice that of the echo.
#include <grpcpp/grpcpp.h>

#include <algorithm>
#include <chrono>
#include <cstdio>
#include <cstdlib>
#include <functional>
#include <vector>

#include "coordinator/services/coordinator.hpp"
#include "coordinator/services/server.hpp"
#include "holdfast.grpc.pb.h"
#include "tests/support/stand_in.hpp"

namespace {

using namespace holdfast;

/// The empty echo: the same message types, nothing done.
class Echo final : public v1::Evaluation::CallbackService {
 public:
  grpc::ServerUnaryReactor* Evaluate(grpc::CallbackServerContext* context, const v1::EvaluateRequest*,
                                     v1::EvaluateReply*) override {
    auto* reactor = context->DefaultReactor();
    reactor->Finish(grpc::Status::OK);
    return reactor;
  }
};

double microseconds(const std::function<void()>& what) {
  const auto begin = std::chrono::steady_clock::now();
  what();
  return std::chrono::duration<double, std::micro>(std::chrono::steady_clock::now() - begin).count();
}

double percentile(std::vector<double> times, double share) {
  std::sort(times.begin(), times.end());
  return times[static_cast<std::size_t>(share * static_cast<double>(times.size() - 1))];
}

}  // namespace

int main() {
  const tests::TemporaryFolder folder;
  auto store = coordinator::Store::open(folder / "store");
  auto started = coordinator::Coordinator::start(std::move(*store), tests::library(), {});
  auto served = coordinator::Server::start(**started, tests::library(), {"127.0.0.1:0", 1});
  Echo echo;
  int echo_port = 0;
  grpc::ServerBuilder builder;
  builder.AddListeningPort("127.0.0.1:0", grpc::InsecureServerCredentials(), &echo_port);
  builder.RegisterService(&echo);
  const auto echo_server = builder.BuildAndStart();

  v1::EvaluateRequest request;
  request.add_components("R-290");
  request.set_equation("reference");
  request.set_first("T");
  request.set_second("p");
  request.add_first_values(300);
  request.add_second_values(1e5);
  for (const char* column : {"rho", "h", "cp", "(dh/dp)_T"}) request.add_columns(column);
  const auto call = [&request](v1::Evaluation::Stub& stub) {
    grpc::ClientContext context;
    v1::EvaluateReply reply;
    const grpc::Status status = stub.Evaluate(&context, request, &reply);
    if (!status.ok()) {
      std::fprintf(stderr, "%s\n", status.error_message().c_str());
      std::exit(1);
    }
  };
  const auto evaluation =
      v1::Evaluation::NewStub(worker::channelTo("127.0.0.1:" + std::to_string((*served)->port())));
  const auto nothing = v1::Evaluation::NewStub(worker::channelTo("127.0.0.1:" + std::to_string(echo_port)));
  std::vector<double> with_work;
  std::vector<double> without;
  for (int i = 0; i < 5500; ++i) {  // in turn, so that a slow moment of the machine falls on both
    const double one = microseconds([&] { call(*evaluation); });
    const double other = microseconds([&] { call(*nothing); });
    if (i < 500) continue;  // connections, candidate, caches
    with_work.push_back(one);
    without.push_back(other);
  }
  std::printf("Evaluate, one state, 4 columns   p50 %6.1f us   p99 %6.1f us\n", percentile(with_work, 0.5),
              percentile(with_work, 0.99));
  std::printf("empty echo                       p50 %6.1f us   p99 %6.1f us\n", percentile(without, 0.5),
              percentile(without, 0.99));
  std::printf("ratio of p50                     %.2f   (goal <= 2)\n",
              percentile(with_work, 0.5) / percentile(without, 0.5));
}
