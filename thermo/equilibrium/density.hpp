// The density of a single phase at (T, p): safeguarded Newton steps on p(T, rho), lanes side by side, each
// lane started from its neighbour along the tile (first-order extrapolation with the partials that the last
// step has anyway).
#pragma once

#include <array>

#include "thermo/equations/model.hpp"
#include "thermo/tile.hpp"

namespace holdfast::thermo {

/// Which root of p(T, rho) = p is wanted.
enum class Root : std::uint8_t {
  liquid,  ///< the densest mechanically stable root
  vapour,  ///< the thinnest
  only,    ///< T above the critical temperature: p is monotonic in rho
};

/// What a solve is given, lane by lane.
struct DensityInput {
  int count = 0;
  Row T;  ///< K
  Row p;  ///< Pa
  std::array<Root, kTile> root;
  Row from, up_to;  ///< mol/m3: a bracket in which p(rho) is increasing and the root lies
  Row start;        ///< mol/m3: first guess inside the bracket, used where no neighbour serves
};

struct DensityTile {
  Row rho;  ///< mol/m3; relative error a few ulp times the condition |p/(rho p_rho)|
  std::array<bool, kTile> converged;
  int jet_evaluations = 0;  ///< states whose first-order jet was computed: the cost
};

/// Solves every lane. z: composition of the tile.
void solveDensity(const Model& model, const Composition& z, const DensityInput& input, DensityTile& out);

}  // namespace holdfast::thermo
