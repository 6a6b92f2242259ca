// Is a single phase of a blend stable? The tangent-plane test of M. L. Michelsen, Fluid Phase Equilibria 9
// (1982) 1.
#pragma once

#include "thermo/equations/cubic.hpp"
#include "thermo/equations/model.hpp"

namespace holdfast::thermo {

/// Result of the test at one state.
enum class Stability {
  stable,     ///< no trial phase lies below the tangent plane
  unstable,   ///< one does: the state splits
  undecided,  ///< no trial converged
};

/// Tests the phase of density rho (mol/m3) at T (K), composition z. Trials: both Wilson estimates and each
/// nearly pure component.
Stability testStability(const Cubic& equation, const Composition& z, double T, double rho);

}  // namespace holdfast::thermo
