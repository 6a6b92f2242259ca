// The store: one SQLite file, readable with a stock shell. This header is the only door to SQLite.
//
// A job's rows and its `committed` mark are one transaction. Rows are landed by record copy: the coordinator
// writes a small SQLite image of a job's rows by the published file format, attaches it in memory, and INSERT
// INTO points SELECT * FROM image copies the records undecoded.
#pragma once

#include <cstdint>
#include <filesystem>
#include <memory>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "holdfast.pb.h"
#include "thermo/equilibrium/reference_state.hpp"
#include "thermo/fluids/library.hpp"
#include "thermo/result.hpp"

namespace holdfast::coordinator {

enum class StudyState { running, paused, complete, cancelled };
enum class JobState { waiting, leased, returned, committed, failed };
std::string_view nameOf(StudyState state);
std::string_view nameOf(JobState state);

/// A job as the ledger has it.
struct JobRecord {
  std::uint64_t id = 0;  ///< number of the job within its study
  std::uint64_t first_point = 0;
  std::uint32_t points = 0;
  JobState state = JobState::waiting;
  std::uint32_t attempts = 0;  ///< errors so far
  std::string failure;
};

/// A study as the store has it.
struct StudyRecord {
  std::int64_t id = 0;
  std::string name, identity, text, version;
  StudyState state = StudyState::running;
  v1::Plan plan;
  std::uint64_t points_done = 0;
};

/// What is known of a candidate only after it was built (thermo::Candidate).
struct CandidateFacts {
  std::string data_kind;                              ///< where the data of its pairs come from
  std::vector<thermo::ReferenceUsed> reference_used;  ///< one a component
};

/// Studies whose jobs one call of Store::land may carry.
inline constexpr std::size_t kMostStudiesOfLanding = 8;

/// Whether a result can be the answer to a job of this plan: sizes, codes, no value at a point that has no
/// numbers, every value finite. Pure: a service calls it when a result arrives, to know whom to blame;
/// Store::land relies on nobody and checks again.
Status checkResult(const v1::Plan& plan, const v1::JobResult& result);

/// A finished job on its way into the store. `result` is as it came over the wire, see checkResult.
struct FinishedJob {
  std::int64_t study = 0;
  const v1::JobResult* result = nullptr;
  std::string worker;
  std::uint32_t attempts = 0;
  double started_unix = 0, finished_unix = 0;  ///< seconds since 1970, UTC
};

/// One writer. Not safe from several threads at once: its owner serialises calls.
class Store {
 public:
  /// Opens or creates. The Error says what is wrong: a network file system, not a store, of a later version,
  /// read-only, in use.
  static Result<Store> open(const std::filesystem::path& file);
  Store(Store&&) noexcept;
  Store& operator=(Store&&) noexcept;
  ~Store();

  /// Records a new study with its candidates, compositions, columns, fluids and all its jobs (waiting), in
  /// one transaction, and makes its points table and view. Fails if the name is taken. `facts`: one a
  /// candidate of the plan.
  Result<StudyRecord> add(const v1::Plan& plan, std::string_view identity, std::string_view text,
                          std::string_view version, const thermo::FluidLibrary& library,
                          std::span<const CandidateFacts> facts);
  /// Removes a study and everything of it.
  Status drop(std::string_view name);

  /// How often this store was opened, this time included: makes numbers of leases unique over its life.
  std::uint64_t openings() const;

  Result<std::vector<StudyRecord>> studies();
  /// In order of first_point. The ledger knows waiting, committed and failed; what is leased or returned is
  /// known to the coordinator's memory alone, so after any end of the program it waits.
  Result<std::vector<JobRecord>> jobs(std::int64_t study);

  /// Lands whole jobs in one transaction: rows, absences, and the committed mark. When it returns success,
  /// COMMIT is done and on the disk: neither SIGKILL nor a power failure takes it back. All or none: on an
  /// Error (a result that does not fit, a job that is committed already, a full disk) nothing of this call
  /// is in the store. Jobs of at most kMostStudiesOfLanding studies, less than 1 GiB of rows a study.
  Status land(std::span<const FinishedJob> jobs);

  Status setState(std::int64_t study, StudyState state);
  /// Marks a job failed for good, with its reason.
  Status fail(std::int64_t study, const JobRecord& job);
  /// Replaces a waiting job by parts of it, in order, that cover its points; they wait.
  Status replaceJob(std::int64_t study, std::uint64_t job, std::span<const JobRecord> parts);
  /// Lands a waiting job whose points killed worker after worker: outcome `crashed`, no numbers.
  Status landCrashed(std::int64_t study, const JobRecord& job, std::string_view worker);

  struct Impl;

 private:
  explicit Store(std::unique_ptr<Impl> impl);
  std::unique_ptr<Impl> impl_;
};

}  // namespace holdfast::coordinator
