// The coordinator itself, behind its gRPC services: studies, queue, workers and store put together.
//
// Threads: the gRPC threads call in; the writer's thread owns the store; a timer watches deadlines. The queue
// and all else are guarded by one mutex, held for short and never while waiting for the writer or writing to
// a stream.
#pragma once

#include <grpcpp/support/status.h>

#include <condition_variable>
#include <functional>
#include <map>
#include <memory>
#include <mutex>
#include <optional>
#include <set>
#include <string>
#include <thread>
#include <unordered_set>
#include <vector>

#include "coordinator/queue/queue.hpp"
#include "coordinator/services/meter.hpp"
#include "coordinator/services/writer.hpp"
#include "coordinator/store/store.hpp"
#include "coordinator/study/study.hpp"
#include "holdfast.pb.h"
#include "thermo/fluids/library.hpp"

namespace holdfast::coordinator {

struct CoordinatorOptions {
  QueuePolicy policy;
  StudyLimits limits;
  std::optional<std::string> only;  ///< of the studies that run in the store, go on with this one alone
  std::size_t most_bytes_waiting = std::size_t{256} << 20;  ///< to land; beyond it nothing is leased
};

/// The coordinator's end of a worker's stream.
class WorkerPort {
 public:
  virtual ~WorkerPort() = default;
  /// Puts a message in line. Does not block and calls nothing back.
  virtual void enqueue(v1::ToWorker message) = 0;
  /// Starts to send what is in line. Called without the coordinator's lock.
  virtual void flush() = 0;
  /// Ends the stream after what is being sent. Called without the coordinator's lock.
  virtual void finish(const grpc::Status& status) = 0;
};

/// Who wants to hear of a study's progress.
class Follower {
 public:
  virtual ~Follower() = default;
  /// Does not block. The last call has a state other than running.
  virtual void tell(const v1::Progress& progress) = 0;
};

/// Safe from many threads.
class Coordinator {
 public:
  /// Takes the store over and goes on with the studies that are running in it.
  static Result<std::unique_ptr<Coordinator>> start(Store store,
                                                    std::shared_ptr<const thermo::FluidLibrary> library,
                                                    const CoordinatorOptions& options);
  /// Lands what was returned. Studies stay as they are in the store.
  ~Coordinator();
  Coordinator(const Coordinator&) = delete;
  Coordinator& operator=(const Coordinator&) = delete;

  // Clients: contracts as in the service Studies. submit, cancel and pause wait for the store.
  grpc::Status submit(const v1::SubmitRequest& request, v1::SubmitReply& reply);
  grpc::Status cancel(const std::string& name, v1::CancelReply& reply);
  grpc::Status pause(const std::string& name);
  std::vector<v1::Progress> list();
  std::optional<v1::Progress> progress(const std::string& name);
  /// Returns when the study is no longer running, the store has failed, or `longest` has passed.
  std::optional<v1::Progress> await(const std::string& name, std::chrono::milliseconds longest);
  grpc::Status follow(const std::string& name, const std::shared_ptr<Follower>& follower);

  // Workers: contracts as in the service Work. A status other than OK ends the stream.
  grpc::Status join(const v1::Hello& hello, const std::shared_ptr<WorkerPort>& port, WorkerId& worker);
  grpc::Status hear(WorkerId worker, v1::FromWorker& message);
  void leave(WorkerId worker);  ///< also for one that has left already

  /// What broke the store, if anything did: then nothing goes on.
  std::optional<Error> failure();

 private:
  struct Study {
    StudyRecord record;  ///< text and plan left out
    std::shared_ptr<const v1::Plan> plan;
    Meter meter{0, 0};
    std::uint64_t jobs_failed = 0;
    bool queued = false;
  };
  struct Worker {
    std::string name;
    unsigned threads = 1;
    std::shared_ptr<WorkerPort> port;
    std::unordered_set<StudyId> knows;  ///< studies whose plan it has
    bool starved = false;               ///< wants work
    bool leaving = false;               ///< has given back: wants none
  };
  struct Following {
    std::string name;
    std::shared_ptr<Follower> follower;
  };
  struct OpenJobs {
    std::vector<QueuedJob> jobs;
    std::uint64_t next_job = 0;
    std::uint64_t failed = 0;
  };
  using Ports = std::vector<std::shared_ptr<WorkerPort>>;

  Coordinator(Store store, std::shared_ptr<const thermo::FluidLibrary> library,
              const CoordinatorOptions& options);

  static Result<OpenJobs> openJobs(Store& store, StudyId study);
  grpc::Status resume(Study& study, v1::SubmitReply& reply);
  grpc::Status stop(const std::string& name, StudyState state);

  // The following are called with mutex_ held; they put messages in line and note the ports to flush.
  Study* find(const std::string& name);
  Study& adopt(StudyRecord record);
  void queue(Study& study, const OpenJobs& open);
  void unqueue(Study& study, Ports& ports);
  void topUp(WorkerId id, Worker& worker, Ports& ports);
  void topUpStarved(Ports& ports);
  Ports expire(Instant now);  ///< workers whose leases expired, let go; their streams have to be ended
  void decide(const Decision& decision);
  void finishIfDone(Study& study);
  v1::Progress progressOf(const Study& study) const;

  grpc::Status hearResult(WorkerId worker, v1::JobResult& result);
  void hearFailure(WorkerId worker, const v1::JobFailure& failure);
  void hearGiveBack(WorkerId worker, const v1::GiveBack& given);
  void jobError(WorkerId worker, std::uint64_t lease, std::uint64_t job, std::string_view reason);
  void landed(std::span<const Landing> landings);
  void broke(const Error& error);
  void watch();
  void tellFollowers();

  std::shared_ptr<const thermo::FluidLibrary> library_;
  CoordinatorOptions options_;
  std::mutex submit_mutex_;  ///< one change of the set of studies at a time; taken before mutex_
  std::mutex mutex_;
  std::condition_variable changed_;  ///< a study's state, or the end
  Queue queue_;
  std::map<StudyId, Study> studies_;
  std::map<WorkerId, Worker> workers_;
  WorkerId next_worker_ = 1;
  std::vector<Following> followers_;
  std::optional<Error> failure_;
  bool ending_ = false;
  std::unique_ptr<Writer> writer_;  ///< ends before all it calls back into
  std::thread timer_;
};

}  // namespace holdfast::coordinator
