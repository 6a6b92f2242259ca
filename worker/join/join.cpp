#include "worker/join/join.hpp"

#include <grpcpp/grpcpp.h>
#include <spdlog/spdlog.h>
#include <tbb/global_control.h>

#include <algorithm>
#include <random>
#include <thread>

#include "worker/join/session.hpp"

namespace holdfast::worker {
namespace {

using std::chrono::milliseconds;

constexpr milliseconds kShortestPause{200};
constexpr milliseconds kLongestPause{10'000};
constexpr milliseconds kGlance{20};

/// Whether it makes no sense to come again.
bool isFinal(grpc::StatusCode code) {
  return code == grpc::StatusCode::FAILED_PRECONDITION || code == grpc::StatusCode::INVALID_ARGUMENT ||
         code == grpc::StatusCode::UNIMPLEMENTED;
}

void pause(milliseconds length, const Leaving& leaving) {
  const auto end = std::chrono::steady_clock::now() + length;
  while (!leaving.soon && !leaving.now && std::chrono::steady_clock::now() < end)
    std::this_thread::sleep_for(kGlance);
}

}  // namespace

std::shared_ptr<grpc::Channel> channelTo(const std::string& address) {
  grpc::ChannelArguments arguments;
  arguments.SetMaxReceiveMessageSize(64 << 20);
  // A coordinator that has vanished without a word is found out.
  arguments.SetInt(GRPC_ARG_KEEPALIVE_TIME_MS, 20'000);
  arguments.SetInt(GRPC_ARG_KEEPALIVE_TIMEOUT_MS, 10'000);
  arguments.SetInt(GRPC_ARG_HTTP2_MAX_PINGS_WITHOUT_DATA, 0);
  arguments.SetInt(GRPC_ARG_MIN_RECONNECT_BACKOFF_MS, static_cast<int>(kShortestPause.count()));
  arguments.SetInt(GRPC_ARG_INITIAL_RECONNECT_BACKOFF_MS, static_cast<int>(kShortestPause.count()));
  arguments.SetInt(GRPC_ARG_MAX_RECONNECT_BACKOFF_MS, static_cast<int>(kLongestPause.count()));
  return grpc::CreateCustomChannel(address, grpc::InsecureChannelCredentials(), arguments);
}

Status serve(const std::shared_ptr<grpc::Channel>& channel,
             const std::shared_ptr<const thermo::FluidLibrary>& library, const JoinOptions& options,
             const Leaving& leaving) {
  // TBB keeps a place for the thread that waits for the work; here that one does not compute.
  const tbb::global_control threads(tbb::global_control::max_allowed_parallelism, options.threads + 1);
  std::minstd_rand random(std::random_device{}());
  milliseconds longest = kShortestPause;
  while (!leaving.soon && !leaving.now) {
    Session session(channel, *library, options, leaving);
    const grpc::Status status = session.serve();
    if (isFinal(status.error_code())) return Error{"the coordinator refuses: " + status.error_message()};
    if (leaving.soon || leaving.now) break;
    if (session.wasWelcome()) longest = kShortestPause;
    spdlog::info("the coordinator is away ({}): coming again", status.error_message());
    // Half to all of it, at random: a thousand workers must not come back at once.
    pause(milliseconds(std::uniform_int_distribution<long>(longest.count() / 2, longest.count())(random)),
          leaving);
    longest = std::min(2 * longest, kLongestPause);
  }
  return success();
}

}  // namespace holdfast::worker
