// From a specification to a state: the equilibrium room's front door.
#pragma once

#include <memory>
#include <optional>

#include "thermo/equilibrium/candidate.hpp"
#include "thermo/state.hpp"

namespace holdfast::thermo {

/// What to do beyond the stated validity of an equation.
enum class BeyondValidity { compute, refuse };

/// Solves a tile of specifications at one composition.
///   (T,p)     the stable root. Pure: liquid above p_sat(T), vapour below. Blend: the root of lower Gibbs
///   energy, then
///             the tangent-plane test (Michelsen 1982): an unstable state is `splits` and has no numbers.
///   (T,rho)   the state there; a pure state inside the dome is two-phase with beta by the lever rule.
///   (T,beta), (p,beta)  pure: saturated or two-phase; beta = 0 or 1 is that phase's single-phase state
///   (`saturated` set).
/// Never fails as a whole: what went wrong is each lane's outcome and reason.
void solveStates(const Candidate& candidate, const Composition& z, BeyondValidity beyond,
                 const InputTile& input, StateTile& out);

}  // namespace holdfast::thermo
