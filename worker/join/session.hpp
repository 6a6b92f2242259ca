// One stream to a coordinator, from Hello to its end.
#pragma once

#include <grpcpp/grpcpp.h>
#include <tbb/task_arena.h>

#include <atomic>
#include <condition_variable>
#include <deque>
#include <map>
#include <memory>
#include <mutex>
#include <string>
#include <thread>

#include "holdfast.grpc.pb.h"
#include "worker/join/join.hpp"

namespace holdfast::worker {

class Session {
 public:
  Session(const std::shared_ptr<grpc::Channel>& channel, const thermo::FluidLibrary& library,
          const JoinOptions& options, const Leaving& leaving);

  /// Serves until the stream ends or the worker leaves. How the stream ended; OK after leaving.
  grpc::Status serve();
  /// Whether the coordinator let this worker in.
  bool wasWelcome() const { return welcome_.load(); }

 private:
  struct Job {
    std::uint64_t lease = 0;
    std::uint64_t study = 0;
    v1::LeasedJob job;
    std::atomic<bool> stop{false};
    bool withdrawn = false;  ///< nobody wants to hear of it any more
  };
  using JobPointer = std::shared_ptr<Job>;

  void receive();
  void take(const v1::Lease& lease);
  void prepare(const v1::StudyPlan& study);
  void withdraw(std::uint64_t lease);
  void startJobs();  ///< with mutex_ held
  void compute(const JobPointer& job);
  void beat();
  void leave();
  void send(const v1::FromWorker& message);
  void giveBack(const Job& job);

  const thermo::FluidLibrary& library_;
  const JoinOptions& options_;
  const Leaving& leaving_;
  grpc::ClientContext context_;
  std::unique_ptr<v1::Work::Stub> stub_;
  std::unique_ptr<grpc::ClientReaderWriter<v1::FromWorker, v1::ToWorker>> stream_;
  std::mutex send_mutex_;  ///< one writes at a time
  bool closed_ = false;    ///< with send_mutex_: nothing may be written any more
  std::atomic<bool> welcome_{false};

  std::mutex mutex_;
  std::condition_variable changed_;
  std::map<std::uint64_t, Result<std::shared_ptr<const PreparedStudy>>> studies_;
  std::deque<JobPointer> line_;     ///< leased, not begun
  std::deque<JobPointer> in_hand_;  ///< being computed
  std::size_t tiles_in_hand_ = 0;
  std::size_t tasks_ = 0;  ///< in the arena, that use this object
  std::chrono::milliseconds heartbeat_{1000};
  bool stream_ended_ = false;
  bool leaves_ = false;  ///< begins nothing more
  tbb::task_arena arena_;
};

}  // namespace holdfast::worker
