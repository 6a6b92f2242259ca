// The ideal part: f(T) of a component from its ideal-gas heat capacity,
//
//   cp0/R = c0 + sum_k c_k (T/K)^e_k + sum_k v_k (u_k/T)^2 exp(u_k/T) / (exp(u_k/T) - 1)^2      (v_k may be
//   negative)
//
// integrated in closed form. Two constants of integration are left: those of the reference state.
#pragma once

#include "thermo/fluids/equation_data.hpp"
#include "thermo/jet/jet.hpp"
#include "thermo/tile.hpp"

namespace holdfast::thermo {

/// f(T) with its two constants. Immutable but for shifted().
class IdealPart {
 public:
  explicit IdealPart(IdealHeatCapacity cp0);

  const IdealHeatCapacity& heatCapacity() const { return cp0_; }

  /// The same ideal part with u0/(R T) larger by energy/T and s0/R larger by `entropy`:
  /// energy = Delta h / R in K, entropy = Delta s / R.
  struct Shift {
    double energy = 0;   ///< K
    double entropy = 0;  ///< 1
  };
  IdealPart shifted(Shift by) const;

  /// Fills the ideal rows of `order` for lanes 0..paddedLanes(count)-1. T filled. Not blended: f of this
  /// component alone.
  void evaluate(Order order, int count, const Row& T, IdealTile& out) const;

 private:
  IdealHeatCapacity cp0_;
  Shift constants_;
};

}  // namespace holdfast::thermo
