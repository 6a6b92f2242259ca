// All services on one gRPC server, with health and reflection.
#pragma once

#include <grpcpp/channel.h>

#include <memory>
#include <optional>
#include <string>
#include <string_view>

#include "coordinator/services/coordinator.hpp"
#include "thermo/fluids/library.hpp"
#include "thermo/result.hpp"

namespace holdfast::coordinator {

/// Whether others than this machine could connect, and nothing protects the line.
enum class Exposure { loopback_only, insecure_allowed };

/// Fails with a sentence if `address` ("HOST:PORT", "[::1]:PORT", "unix:PATH") is not a loopback or local one
/// and exposure does not allow it.
Status checkListen(std::string_view address, Exposure exposure);

struct ServerOptions {
  std::optional<std::string> listen;  ///< checked with checkListen; none: in-process only
  unsigned evaluation_threads = 1;
};

class Server {
 public:
  /// Serves `coordinator`, which must outlive it.
  static Result<std::unique_ptr<Server>> start(Coordinator& coordinator,
                                               std::shared_ptr<const thermo::FluidLibrary> library,
                                               const ServerOptions& options);
  /// Ends all calls.
  ~Server();
  Server(const Server&) = delete;
  Server& operator=(const Server&) = delete;

  int port() const;  ///< TCP port in use ("HOST:0" picks one); 0 if it does not listen on one
  std::shared_ptr<grpc::Channel> inProcessChannel();

 private:
  struct Parts;
  explicit Server(std::unique_ptr<Parts> parts);
  std::unique_ptr<Parts> parts_;
};

}  // namespace holdfast::coordinator
