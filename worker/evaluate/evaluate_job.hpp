// The evaluator of jobs: a plan's points with TBB, tile by tile.
#pragma once

#include <atomic>
#include <memory>
#include <string>

#include "holdfast.pb.h"
#include "thermo/fluids/library.hpp"
#include "thermo/result.hpp"

namespace holdfast::worker {

/// A plan made ready: every candidate built, columns compiled. Immutable after construction: safe from many
/// threads.
class PreparedStudy {
 public:
  /// The Error names the candidate that cannot be built.
  static Result<std::shared_ptr<const PreparedStudy>> prepare(const v1::Plan& plan,
                                                              const thermo::FluidLibrary& library);
  virtual ~PreparedStudy() = default;

  /// Computes all columns of points first_point.. of the plan on the calling thread's TBB arena. `job` gives
  /// number and range and must lie inside the plan; the lease number is left to the caller. Stops early
  /// (Error) when `stop` becomes true.
  virtual Result<v1::JobResult> evaluate(const v1::LeasedJob& job, const std::atomic<bool>& stop) const = 0;
};

}  // namespace holdfast::worker
