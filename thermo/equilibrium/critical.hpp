// The critical point of a pure equation itself: p_rho = p_rhorho = 0, from a printed starting value.
#pragma once

#include "thermo/equations/equation.hpp"
#include "thermo/equations/model.hpp"
#include "thermo/result.hpp"

namespace holdfast::thermo {

/// The temperature at which the least slope (dp/drho)_T of an isotherm passes through zero, within 8 % of
/// `start`, by exact slopes and bends. The Error says where none was found.
Result<CriticalPoint> findCriticalPoint(const Equation& pure, CriticalPoint start);

}  // namespace holdfast::thermo
