// States in, values and partials out: what the service Evaluation and the command `evaluate` both answer
// with.
#pragma once

#include <cstddef>

#include "coordinator/services/candidate_cache.hpp"
#include "holdfast.pb.h"
#include "thermo/result.hpp"

namespace holdfast::coordinator {

/// The most of each that one request may ask for.
struct EvaluateLimits {
  static constexpr int kStates = 65536;
  static constexpr int kColumns = 256;
  static constexpr std::size_t kValues = std::size_t{1} << 22;  ///< states times columns: 32 MiB of reply
};

/// Computes all states on the calling thread's TBB arena, tile by tile. The Error says what is wrong with the
/// request; what went wrong with a state stands in the reply.
Result<v1::EvaluateReply> evaluateRequest(const v1::EvaluateRequest& request, CandidateCache& candidates);

}  // namespace holdfast::coordinator
