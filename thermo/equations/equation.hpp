// What an equation of state is to the rest of the house: a maker of residual jets.
#pragma once

#include <array>
#include <string_view>

#include "thermo/jet/jet.hpp"
#include "thermo/tile.hpp"

namespace holdfast::thermo {

/// Where jets are wanted. Rows must be filled (Row::fill) up to paddedLanes(count).
struct EquationStates {
  int count = 0;             ///< states, 1..kTile
  const Row* T = nullptr;    ///< K, > 0
  const Row* rho = nullptr;  ///< mol/m3, >= 0
  const Row* z = nullptr;  ///< mole fraction rows, one a component: z[component][lane]; null for a pure fluid
};

/// An equation of state: alphar(T, rho, z) and its derivatives. Immutable after construction: safe from many
/// threads. A lane never depends on another lane, and its bits never depend on which lane it is in.
class Equation {
 public:
  virtual ~Equation() = default;

  /// Components, 1..kMostComponents. Composition order everywhere is the order the equation was made with.
  virtual int components() const = 0;

  /// Fills the residual rows of `order` (a prefix of `out`), lanes 0..paddedLanes(count)-1. Never fails: a
  /// state outside what the equation can express (rho beyond the covolume of a cubic) gives non-finite
  /// numbers in its own lane only.
  virtual void residual(Order order, const EquationStates& states, ResidualTile& out) const = 0;

  /// Gas constant of component i as the equation uses it, J/(mol K). A blend's is sum z_i R_i.
  virtual double gasConstant(int component) const = 0;

  /// A molar density beyond which the equation has no meaning at this composition (mol/m3): 1/b of a cubic;
  /// for a reference equation, generously above its compressed liquid. Solvers bracket with it. z: one mole
  /// fraction a component.
  virtual double densityLimit(const std::array<double, kMostComponents>& z) const = 0;
};

}  // namespace holdfast::thermo
