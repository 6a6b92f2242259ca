// The critical point of a pure equation itself: p_rho = p_rhorho = 0, from a printed starting value.
#pragma once

#include "thermo/equations/equation.hpp"
#include "thermo/equations/model.hpp"
#include "thermo/result.hpp"

namespace holdfast::thermo {

/// Newton's method on (p_rho, p_rhorho) = 0 with exact third derivatives (and, for their slopes, the secant
/// of the last steps), within a few percent of `start`. The Error says how far it came.
Result<CriticalPoint> findCriticalPoint(const Equation& pure, CriticalPoint start);

}  // namespace holdfast::thermo
