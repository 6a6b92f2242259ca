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

/// The two constants of integration, zero before a reference state is fixed.
struct IdealConstants {
  double energy = 0;   ///< K: h0/R and u0/R are larger by it
  double entropy = 0;  ///< s0/R is larger by it
};

/// f(T) with its two constants. Immutable but for shifted().
class IdealPart {
 public:
  explicit IdealPart(IdealHeatCapacity cp0);

  const IdealHeatCapacity& heatCapacity() const { return cp0_; }

  /// The same ideal part with its constants changed by these.
  IdealPart shifted(IdealConstants by) const;

  /// Fills the ideal rows of `order` for lanes 0..paddedLanes(count)-1. T filled. Not blended: f of this
  /// component alone.
  void evaluate(Order order, int count, const Row& T, IdealTile& out) const;

 private:
  IdealHeatCapacity cp0_;
  IdealConstants constants_;
};

}  // namespace holdfast::thermo
