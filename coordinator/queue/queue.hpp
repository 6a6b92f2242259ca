// Who does which job: leases, deadlines, faults. Pure logic: no thread, no clock of its own, no network, no
// store. Every call that needs the time is handed it.
//
//   waiting -> leased -> returned -> committed
//   leased -> waiting     given back, lease lost, or an error that is not the last one allowed
//   leased -> failed      the last error allowed
//
// A lost lease (its worker is gone or silent) is nobody's error. But a job whose leases were lost too often
// may be what kills its workers: it becomes a suspect, is leased alone to a worker that has nothing else, and
// is halved by tile whenever that lease is lost too, down to the single point, which is given up as crashed.
#pragma once

#include <array>
#include <chrono>
#include <cstdint>
#include <deque>
#include <map>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <variant>
#include <vector>

namespace holdfast::coordinator {

using Instant = std::chrono::steady_clock::time_point;
using StudyId = std::int64_t;    ///< the store's study.id
using WorkerId = std::uint64_t;  ///< one a joined stream, never used again
using LeaseId = std::uint64_t;

struct QueuePolicy {
  std::chrono::milliseconds lease{30'000};   ///< from grant, or from the last sign of life of its worker
  std::chrono::milliseconds stall{900'000};  ///< a worker alive but without any result for so long is hung
  unsigned errors = 3;                       ///< a job that returned so many errors has failed
  unsigned losses = 3;                       ///< a job lost so many times is a suspect
};

struct QueuedJob {
  std::uint64_t id = 0;  ///< within its study
  std::uint64_t first_point = 0;
  std::uint32_t points = 0;
  std::uint32_t attempts = 0;  ///< errors so far
};

struct GrantedLease {
  LeaseId lease = 0;
  StudyId study = 0;
  std::vector<QueuedJob> jobs;
};

/// A job as a worker holds it.
struct HeldJob {
  StudyId study = 0;
  QueuedJob job;
};

/// What the store has to be told after a fault, in this order.
struct JobFailed {
  StudyId study = 0;
  QueuedJob job;
  std::string reason;
};
struct JobHalved {
  StudyId study = 0;
  std::uint64_t job = 0;
  std::array<QueuedJob, 2> parts;
};
/// One point that killed its workers. It counts as returned until committed() is called for it.
struct JobCrashed {
  StudyId study = 0;
  QueuedJob job;
  WorkerId worker = 0;  ///< the last it was lost with
};
using Decision = std::variant<JobFailed, JobHalved, JobCrashed>;

struct LeaseOfWorker {
  WorkerId worker = 0;
  LeaseId lease = 0;
};

struct Losses {
  std::vector<LeaseOfWorker> leases;  ///< no longer valid
  std::vector<Decision> decisions;
};

struct JobCounts {
  std::uint64_t waiting = 0, leased = 0, returned = 0, committed = 0, failed = 0;
  std::uint64_t open() const { return waiting + leased + returned; }
};

/// How many jobs to lease to a worker at once: enough that it has work while messages travel, more for more
/// threads, but near a study's end no more than leaves some for the others. 0: it has enough.
std::size_t leaseSize(std::uint64_t waiting, std::size_t workers, unsigned threads, std::size_t held);

/// Not safe from several threads at once.
class Queue {
 public:
  /// Lease numbers start at `first_lease`: above all that earlier runs on the same store gave out.
  Queue(QueuePolicy policy, LeaseId first_lease);

  /// Queues a study's open jobs, ascending by id. Halves are numbered from `next_job`, which must be above
  /// every id the study ever had. The study must not be queued already.
  void addStudy(StudyId study, std::span<const QueuedJob> open, std::uint64_t next_job);
  /// Forgets a study; its leases are no longer valid.
  std::vector<LeaseOfWorker> removeStudy(StudyId study);

  /// At most `most` waiting jobs of one study; studies take turns. Nothing if there is no work for this
  /// worker now: none waits, it holds a suspect, or a suspect waits for it to finish what it holds.
  std::optional<GrantedLease> grant(WorkerId worker, std::size_t most, Instant now);

  /// A sign of life: renews the worker's leases.
  void heard(WorkerId worker, Instant now);

  /// The job if this worker holds it under this lease; nothing if the lease has ended: then what the worker
  /// says of it is to be ignored.
  std::optional<HeldJob> find(WorkerId worker, LeaseId lease, std::uint64_t job) const;

  /// The three ways a held job ends. Nothing happens if find() would find nothing.
  void returned(WorkerId worker, LeaseId lease, std::uint64_t job, Instant now);
  std::optional<JobFailed> error(WorkerId worker, LeaseId lease, std::uint64_t job, std::string_view reason,
                                 Instant now);
  void giveBack(WorkerId worker, LeaseId lease, std::uint64_t job);

  /// A returned job is in the store.
  void committed(StudyId study, std::uint64_t job);

  /// The worker is gone: all its leases are lost.
  Losses lose(WorkerId worker);
  /// Leases whose deadline has passed are lost.
  Losses expire(Instant now);

  JobCounts counts(StudyId study) const;  ///< all zero for a study that is not queued; committed: since added
  std::uint64_t waiting() const;          ///< jobs waiting, over all studies
  std::size_t held(WorkerId worker) const;  ///< jobs leased to it

 private:
  enum class State : std::uint8_t { waiting, leased, returned, committed, failed, replaced };
  struct Record {
    std::uint64_t id = 0;
    std::uint64_t first_point = 0;
    std::uint32_t points = 0;
    std::uint16_t attempts = 0;
    State state = State::waiting;
    std::uint8_t losses = 0;
  };
  struct Study {
    std::vector<Record> records;              ///< ascending by id
    std::size_t next = 0;                     ///< records from here on have never been leased
    std::deque<std::size_t> again, suspects;  ///< indexes of waiting records that have
    std::uint64_t next_job = 0;
    JobCounts counts;
  };
  struct Lease {
    WorkerId worker = 0;
    StudyId study = 0;
    std::vector<std::uint64_t> jobs;  ///< still held
    Instant deadline, active;         ///< active: of the last result, or of the grant
    bool alone = false;
  };
  struct Held {
    Study* study;
    Record* record;
  };

  static std::optional<std::size_t> indexOf(const Study& study, std::uint64_t job);
  Held take(LeaseId lease, std::uint64_t job);
  void waitAgain(Study& study, std::size_t index) const;
  void loseLease(LeaseId lease, Losses& losses);
  void loseJob(Study& study, const Lease& lease, std::uint64_t job, std::vector<Decision>& decisions) const;
  GrantedLease lend(StudyId id, Study& study, WorkerId worker, std::size_t most, Instant now);
  void endIfEmpty(LeaseId lease);

  QueuePolicy policy_;
  LeaseId next_lease_;
  std::map<StudyId, Study> studies_;
  StudyId last_served_ = 0;
  std::map<LeaseId, Lease> leases_;
  std::map<WorkerId, std::vector<LeaseId>> workers_;  ///< leases in force
};

}  // namespace holdfast::coordinator
