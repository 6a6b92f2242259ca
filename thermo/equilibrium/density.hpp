// The density of a single phase of a pure model at (T, p): safeguarded Newton steps on p(T, rho). Eight lanes
// work side by side, each along a stretch of consecutive points: every point starts from its neighbour,
// extrapolated with (drho/dp)_T and (drho/dT)_p, which the last step has anyway. A lane never depends on the
// lane beside it.
#pragma once

#include <array>
#include <cstdint>

#include "thermo/equations/model.hpp"
#include "thermo/tile.hpp"

namespace holdfast::thermo {

/// Which root of p(T, rho) = p is wanted.
enum class Root : std::uint8_t {
  liquid,  ///< the dense one: p is convex in rho from `from` on
  vapour,  ///< the thin one: p is concave in rho up to `up_to`
  only,    ///< T above the critical temperature: p grows with rho throughout
};

/// What a solve is given, lane by lane.
struct DensityInput {
  int count = 0;
  Row T;  ///< K
  Row p;  ///< Pa, > 0
  std::array<Root, kTile> root;
  Row from, up_to;  ///< mol/m3: a bracket of the root in which p(rho) grows
  Row start;        ///< mol/m3: first guess inside the bracket, used where no neighbour serves
};

struct DensityTile {
  Row rho;  ///< mol/m3; relative error a few 1e-16 over (dp/drho)_T/(R T)
  std::array<bool, kTile> converged;
  int steps = 0;  ///< Newton steps, summed over the points: the cost
};

/// Solves every lane.
void solveDensity(const Model& model, const DensityInput& input, DensityTile& out);

}  // namespace holdfast::thermo
