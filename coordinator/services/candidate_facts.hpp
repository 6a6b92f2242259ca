// What the store records of candidates and only their making tells.
#pragma once

#include <vector>

#include "coordinator/store/store.hpp"
#include "holdfast.pb.h"
#include "thermo/fluids/library.hpp"
#include "thermo/result.hpp"

namespace holdfast::coordinator {

/// One a candidate of the plan, in its order; makes them side by side on the calling thread's TBB arena. The
/// Error names the first candidate that cannot be made and why.
Result<std::vector<CandidateFacts>> candidateFacts(const v1::Plan& plan, const thermo::FluidLibrary& library);

}  // namespace holdfast::coordinator
