// Pure-fluid saturation: equal pressure and equal Gibbs energy, from the triple point (or lowest temperature
// known) to 0.9999 of the equation's own critical temperature.
//
// p_sat is the pressure of the vapour side (at the triple point a liquid cannot resolve it: p = 1.7e-4 Pa of
// propane against 2.6e-7 Pa a unit in the last place of rho'); good to 1e-10 relative. The liquid side meets
// it to a few ulp of rho (dp/drho).
#pragma once

#include <memory>

#include "thermo/equations/model.hpp"
#include "thermo/result.hpp"
#include "thermo/tile.hpp"

namespace holdfast::thermo {

/// Saturated states of a tile. Lanes that failed have converged false and harmless finite rows.
struct SaturationTile {
  Row T, p, rho_liquid, rho_vapour;  ///< K, Pa, mol/m3, mol/m3
  std::array<bool, kTile> converged;
};

/// The saturation line of a pure model. Immutable after construction: safe from many threads.
class SaturationCurve {
 public:
  /// Traces the line once (about a hundred solves) and keeps smooth starting values from it.
  static Result<SaturationCurve> trace(const std::shared_ptr<const Model>& model);

  double lowestT() const;   ///< K: where the tracing began (triple point)
  double highestT() const;  ///< K: at least 0.9999 T_c
  double lowestP() const;   ///< Pa
  double highestP() const;  ///< Pa

  /// Starting values from the traced line, good to about 1e-4 relative; T inside [lowestT, highestT].
  struct Estimate {
    double p, rho_liquid, rho_vapour;
  };
  Estimate near(double T) const;
  double temperatureNear(double p) const;  ///< K, likewise

  /// Solves at given temperatures, or at given pressures; each lane on its own. Lanes outside the line's
  /// range: not converged.
  void atT(int count, const Row& T, SaturationTile& out) const;
  void atP(int count, const Row& p, SaturationTile& out) const;

 private:
  struct Traced;
  explicit SaturationCurve(std::shared_ptr<const Traced> traced);
  std::shared_ptr<const Traced> traced_;
};

}  // namespace holdfast::thermo
