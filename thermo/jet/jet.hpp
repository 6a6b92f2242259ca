// The jet: value and derivatives of the Helmholtz energy at a state. The hinge of the house: equations only
// make jets, the algebra only reads them, neither knows the other.
//
// Everything is dimensionless and per mole at fixed composition. With alpha = A/(n R T), split as
//
//     alpha = alpha0 + alphar,     alpha0 = ln(rho / (mol/m3)) + f(T)     (+ sum_i z_i ln z_i in a blend)
//
// derivatives are taken with the logarithmic operators
//
//     theta_d = rho d/drho at constant T        theta_t = -T d/dT at constant rho   (= tau d/dtau of the
//     published forms)
//
// which do not depend on the reducing density and temperature of an equation. Row (i,j) of the residual part
// holds theta_d^i theta_t^j alphar. In the usual notation of published equations: (1,0) = delta alphar_delta,
// (0,1) = tau alphar_tau, (1,1) = delta tau alphar_delta_tau, (2,0) = delta^2 alphar_delta_delta + delta
// alphar_delta, (0,2) = tau^2 alphar_tau_tau + tau alphar_tau.
//
// The ideal and residual parts stay apart, and what cancels between ideal parts is cancelled on paper (see
// gradients.hpp): a sum of both would lose (dh/dp)_T of a thin vapour.
#pragma once

#include <array>

#include "thermo/tile.hpp"

namespace holdfast::thermo {

/// The highest order of derivative a jet carries: second for first partials, third for second partials and
/// critical points.
enum class Order { zeroth = 0, first = 1, second = 2, third = 3 };

/// Rows of the residual part, by order, so that an order is a prefix. rIJ = theta_d^I theta_t^J alphar.
enum ResidualRow { r00, r10, r01, r20, r11, r02, r30, r21, r12, r03, kResidualRows };

/// Rows of the ideal part f(T).
///   i_f   f                                    (zeroth order)
///   i_u   theta_t f = u0/(R T)                 (first)
///   i_cv  cv0/R = theta_t f - theta_t^2 f      (second); kept itself so that no reference energy cancels in
///   it i_dcv T d(cv0/R)/dT                        (third)
enum IdealRow { i_f, i_u, i_cv, i_dcv, kIdealRows };

/// Number of residual rows that an order fills: 1, 3, 6, 10.
constexpr int residualRows(Order order) {
  const int n = static_cast<int>(order) + 1;
  return n * (n + 1) / 2;
}
/// Number of ideal rows that an order fills: 1 to 4.
constexpr int idealRows(Order order) {
  return static_cast<int>(order) + 1;
}

using ResidualTile =
    std::array<Row, kResidualRows>;  ///< [ResidualRow][lane]; rows beyond the order are not touched
using IdealTile = std::array<Row, kIdealRows>;  ///< [IdealRow][lane]

/// Jets of a tile of single-phase states, with what they belong to.
struct JetTile {
  int count = 0;                ///< states, 1..kTile
  Order order = Order::second;  ///< rows filled
  Row T;                        ///< K
  Row rho;                      ///< mol/m3
  double R = 0;                 ///< J/(mol K), of the composition, as its equation uses it
  double M = 0;                 ///< kg/mol, of the composition
  IdealTile ideal;
  ResidualTile residual;
};

}  // namespace holdfast::thermo
