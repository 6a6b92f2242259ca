// The client of a coordinator: joins it, computes what it leases, and comes back when it was away.
//
// Threads: one receives, one sends heartbeats, and jobs are computed in a TBB arena of `threads`. More than
// one job is in hand at a time, so that no thread idles at a job's end or while its result is sent.
#pragma once

#include <grpcpp/channel.h>

#include <atomic>
#include <chrono>
#include <functional>
#include <memory>
#include <string>

#include "holdfast.pb.h"
#include "thermo/fluids/library.hpp"
#include "thermo/result.hpp"
#include "worker/evaluate/evaluate_job.hpp"

namespace holdfast::worker {

/// How a plan becomes ready to be evaluated: PreparedStudy::prepare, or a stand-in.
using Prepare =
    std::function<Result<std::shared_ptr<const PreparedStudy>>(const v1::Plan&, const thermo::FluidLibrary&)>;

struct JoinOptions {
  std::string name;      ///< for people: host and process
  unsigned threads = 1;  ///< 1 to 4096
  Prepare prepare = PreparedStudy::prepare;
};

/// What a worker is told from outside, by any thread or a signal handler (lock-free atomics).
struct Leaving {
  std::atomic<bool> soon{false};  ///< gives back what it has not begun, finishes the rest, leaves
  std::atomic<bool> now{false};   ///< gives back everything and leaves
};

/// What the coordinator's channel needs: plans may be large, results are.
std::shared_ptr<grpc::Channel> channelTo(const std::string& address);

/// Serves the coordinator at the other end of `channel` until told to leave. Comes again, with growing pauses
/// of random length, whenever the coordinator is away. The Error says why the coordinator refuses this worker
/// for good (another build, other data).
Status serve(const std::shared_ptr<grpc::Channel>& channel,
             const std::shared_ptr<const thermo::FluidLibrary>& library, const JoinOptions& options,
             const Leaving& leaving);

}  // namespace holdfast::worker
