#include "coordinator/services/server.hpp"

#include <grpcpp/ext/proto_server_reflection_plugin.h>
#include <grpcpp/grpcpp.h>
#include <grpcpp/health_check_service_interface.h>

#include <chrono>
#include <mutex>
#include <utility>

#include "coordinator/services/budget.hpp"
#include "coordinator/services/candidate_cache.hpp"
#include "coordinator/services/evaluation_service.hpp"
#include "coordinator/services/studies_service.hpp"
#include "coordinator/services/work_service.hpp"

namespace holdfast::coordinator {
namespace {

constexpr int kMostMessageBytes = 8 << 20;  // a job's columns are at most 4 MiB
constexpr unsigned kMostRequestsWaiting = 1024;
constexpr std::size_t kCandidatesKept = 256;
constexpr std::chrono::milliseconds kGrace{
    200};  // for calls in hand when the server ends; streams never end by themselves

bool isLoopback(std::string_view host) {
  if (host == "localhost" || host == "[::1]" || host == "::1") return true;
  return host.starts_with("127.") && host.find_first_not_of("0123456789.") == std::string_view::npos;
}

}  // namespace

Status checkListen(std::string_view address, Exposure exposure) {
  if (address.starts_with("unix:")) return success();
  const std::size_t colon = address.rfind(':');
  if (colon == std::string_view::npos || colon + 1 == address.size() ||
      address.find_first_not_of("0123456789", colon + 1) != std::string_view::npos)
    return Error{std::string(address) + ": an address is HOST:PORT"};
  if (exposure == Exposure::insecure_allowed || isLoopback(address.substr(0, colon))) return success();
  return Error{
      "listening on " + std::string(address) +
      " is refused: whoever reaches it could run work and read results, and nothing protects the "
      "line. TLS is not available yet; --insecure listens all the same, for a network that you trust"};
}

struct Server::Parts {
  Parts(Coordinator& coordinator, std::shared_ptr<const thermo::FluidLibrary> library, unsigned threads)
      : candidates(std::move(library), kCandidatesKept),
        budget(threads, kMostRequestsWaiting),
        work(coordinator),
        studies(coordinator, budget),
        evaluation(candidates, budget) {}

  CandidateCache candidates;
  Budget budget;
  WorkService work;
  StudiesService studies;
  EvaluationService evaluation;
  int port = 0;
  std::unique_ptr<grpc::Server> server;
};

Server::Server(std::unique_ptr<Parts> parts) : parts_(std::move(parts)) {}

Server::~Server() {
  parts_->server->Shutdown(std::chrono::system_clock::now() + kGrace);
  parts_->server->Wait();
}

Result<std::unique_ptr<Server>> Server::start(Coordinator& coordinator,
                                              std::shared_ptr<const thermo::FluidLibrary> library,
                                              const ServerOptions& options) {
  static std::once_flag plugins;
  std::call_once(plugins, [] {
    grpc::EnableDefaultHealthCheckService(true);
    grpc::reflection::InitProtoReflectionServerBuilderPlugin();
  });
  auto parts = std::make_unique<Parts>(coordinator, std::move(library), options.evaluation_threads);
  grpc::ServerBuilder builder;
  builder.SetMaxReceiveMessageSize(kMostMessageBytes);
  builder.SetMaxSendMessageSize(-1);
  // A peer that has vanished without a word is found out; workers ping as well.
  builder.AddChannelArgument(GRPC_ARG_KEEPALIVE_TIME_MS, 20'000);
  builder.AddChannelArgument(GRPC_ARG_KEEPALIVE_TIMEOUT_MS, 10'000);
  builder.AddChannelArgument(GRPC_ARG_HTTP2_MIN_RECV_PING_INTERVAL_WITHOUT_DATA_MS, 10'000);
  // Two coordinators on one port would share its workers.
  builder.AddChannelArgument(GRPC_ARG_ALLOW_REUSEPORT, 0);
  if (options.listen)
    builder.AddListeningPort(*options.listen, grpc::InsecureServerCredentials(), &parts->port);
  builder.RegisterService(&parts->work);
  builder.RegisterService(&parts->studies);
  builder.RegisterService(&parts->evaluation);
  parts->server = builder.BuildAndStart();
  const bool is_tcp = options.listen && !options.listen->starts_with("unix:");
  if (parts->server == nullptr || (is_tcp && parts->port == 0))
    return Error{"cannot listen on " + options.listen.value_or("the in-process channel") +
                 ": the address is in use or not of this machine"};
  return std::unique_ptr<Server>(new Server(std::move(parts)));
}

int Server::port() const {
  return parts_->port;
}

std::shared_ptr<grpc::Channel> Server::inProcessChannel() {
  grpc::ChannelArguments arguments;
  arguments.SetMaxReceiveMessageSize(-1);
  return parts_->server->InProcessChannel(arguments);
}

}  // namespace holdfast::coordinator
