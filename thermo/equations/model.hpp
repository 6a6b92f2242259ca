// A model: what a candidate's numbers are computed from. One equation, the ideal parts of its components with
// their reference-state constants fixed, and the constants and limits the solvers need.
#pragma once

#include <array>
#include <memory>
#include <string>
#include <vector>

#include "thermo/equations/equation.hpp"
#include "thermo/equations/ideal.hpp"
#include "thermo/jet/jet.hpp"

namespace holdfast::thermo {

/// Mole fractions of a blend in component order; {1, 0, ...} for a pure fluid.
using Composition = std::array<double, kMostComponents>;

/// The critical point of the equation itself (p_rho = p_rhorho = 0), not the printed one. Of a cubic: its
/// exact conditions.
struct CriticalPoint {
  double T = 0;    ///< K
  double p = 0;    ///< Pa
  double rho = 0;  ///< mol/m3
};

/// Where an equation is stated to hold.
struct Validity {
  double T_from = 0, T_up_to = 0;  ///< K
  double p_up_to = 0;              ///< Pa
};

/// One component of a model.
struct ModelComponent {
  std::string designation;  ///< ISO 817 designation, or the chemical name where there is none
  double M = 0;             ///< kg/mol
  CriticalPoint critical;   ///< of this model's equation for the pure component
  double acentric_factor = 0;
  double T_triple = 0;  ///< K; the lowest saturation temperature (T_melt of the catalogue for a cubic)
  double T_boil = 0;    ///< K at 101325 Pa, 0 if not known
  Validity validity;
};

/// Immutable after construction: safe from many threads.
class Model {
 public:
  Model(std::shared_ptr<const Equation> equation, std::vector<ModelComponent> components,
        std::vector<IdealPart> ideal);

  int components() const { return static_cast<int>(components_.size()); }
  bool isPure() const { return components_.size() == 1; }
  const ModelComponent& component(int i) const { return components_[static_cast<std::size_t>(i)]; }
  const IdealPart& idealPart(int i) const { return ideal_[static_cast<std::size_t>(i)]; }
  const Equation& equation() const { return *equation_; }
  const std::shared_ptr<const Equation>& sharedEquation() const { return equation_; }

  double gasConstant(const Composition& z) const;  ///< sum z_i R_i, J/(mol K)
  double molarMass(const Composition& z) const;    ///< sum z_i M_i, kg/mol

  /// The jets of `count` single-phase states at one composition. T and rho rows need not be filled.
  void jets(Order order, int count, const Row& T, const Row& rho, const Composition& z, JetTile& out) const;

  /// Only the residual part (what a density solve needs), same contract.
  void residual(Order order, int count, const Row& T, const Row& rho, const Composition& z,
                ResidualTile& out) const;

 private:
  std::shared_ptr<const Equation> equation_;
  std::vector<ModelComponent> components_;
  std::vector<IdealPart> ideal_;
};

}  // namespace holdfast::thermo
