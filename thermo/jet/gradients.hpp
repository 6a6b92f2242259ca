// From a jet to the nine base quantities with their first derivatives: the table that the partial algebra
// reads.
//
// Directions are ln T (at constant rho) and ln rho (at constant T): scale-free, finite from the triple-point
// vapour to the compressed liquid, and any Jacobian ratio in them equals the one in (T, v). With q = RT,
// letters as in jet.hpp:
//
//   X    value                                  X_lnT                                    X_lnrho
//   T    T                                      T                                        0
//   rho  rho                                    0                                        rho
//   v    1/rho                                  0                                        -1/rho
//   p    rho q (1 + r10)                        rho q (1 + r10 - r11)                    rho q (1 + r10 +
//   r20) s    R (i_u + r01 - i_f - ln rho - r00)     R (i_cv + r01 - r02)                     -R (1 + r10 -
//   r11) u    q (i_u + r01)                          T s_lnT                                  q r11 h    q (1
//   + i_u + r01 + r10)                q (1 + i_cv + r01 - r02 + r10 - r11)     q (r11 + r20) a    u - T s -T
//   s                                     p/rho g    a + p/rho                              -T s + p_lnT/rho
//   p_lnrho/rho
//
// The ideal parts of u_lnrho and h_lnrho cancel on paper: a thin vapour keeps all digits of (dh/dp)_T.
// A two-phase hull (see two_phase in equilibrium/) fills the same table with p_lnrho = T_lnrho = g_lnrho = 0.
#pragma once

#include <array>

#include "thermo/jet/jet.hpp"
#include "thermo/tile.hpp"

namespace holdfast::thermo {

/// The functions of state between which partial derivatives are taken.
enum class Base { T, p, v, rho, u, h, s, a, g };
inline constexpr int kBases = 9;

/// One base quantity over a tile: value and derivatives along ln T and ln rho (of the whole system in two
/// phases). Molar, SI.
struct Gradient {
  Row value;
  Row by_lnT;
  Row by_lnrho;
};

/// What kind of surface the gradients belong to. It decides by rank, never by a tolerance, which partials
/// exist: in one phase only v and rho depend on each other; on the pure hull p, T and g do as well.
enum class Surface { single_phase, pure_two_phase };

/// The nine base quantities of a tile of states on one kind of surface.
struct GradientTile {
  int count = 0;
  Surface surface = Surface::single_phase;
  double R = 0;  ///< J/(mol K)
  double M = 0;  ///< kg/mol
  std::array<Gradient, kBases> base;

  const Gradient& operator[](Base quantity) const { return base[static_cast<std::size_t>(quantity)]; }
  Gradient& operator[](Base quantity) { return base[static_cast<std::size_t>(quantity)]; }
};

/// Reads a second-order (or higher) jet of single-phase states. `out.surface` becomes single_phase.
void gradientsOf(const JetTile& jet, GradientTile& out);

/// Pure two-phase hull by the lever rule. All rows over `count` lanes; liquid and vapour are saturated jets
/// at the same T and p; beta is the molar vapour fraction, 0..1. dp/dT along saturation is Clapeyron's (s'' -
/// s')/(v'' - v'). The hull's heat capacity at constant volume is exact:
///   cv = (1-beta) [cv' - T (p'_T - P)^2 / p'_v] + beta [cv'' - T (p''_T - P)^2 / p''_v],  P = dp_sat/dT
/// (from dA = -S dT - p dV on the hull; A_vv = 0, A_Tv = -P).
void hullOf(const GradientTile& liquid, const GradientTile& vapour, const Row& beta, GradientTile& out);

}  // namespace holdfast::thermo
