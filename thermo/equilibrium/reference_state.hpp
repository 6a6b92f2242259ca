// Where h and s are fixed, per pure component and equation. Blends inherit it and add mixing.
#pragma once

#include <memory>
#include <string>

#include "thermo/equations/model.hpp"
#include "thermo/equilibrium/saturation.hpp"

namespace holdfast::thermo {

/// What a study asks for; the default is the usual 200 kJ/kg and 1 kJ/(kg K) of the liquid at 0 degC. Per
/// mass of component.
struct ReferenceState {
  double T = 273.15;  ///< K, saturated liquid
  double h = 200e3;   ///< J/kg
  double s = 1e3;     ///< J/(kg K)
};

/// What was used for one component: the store's table reference_used.
struct ReferenceUsed {
  std::string state;  ///< "saturated liquid" | "triple-point liquid" | "normal-boiling liquid"
  double T = 0;       ///< K
  double h = 0;       ///< J/kg
  double s = 0;       ///< J/(kg K)
};

struct FixedReference {
  std::shared_ptr<const Model> model;  ///< the same pure model with its ideal constants fixed
  ReferenceUsed used;
};

/// Fixes h and s of a pure model at the saturated liquid of `wanted.T`; where T_triple lies above it, at the
/// triple-point liquid; where T_c lies at or below it, at the normal-boiling liquid (101325 Pa).
Result<FixedReference> fixReference(const std::shared_ptr<const Model>& model, const SaturationCurve& curve,
                                    const ReferenceState& wanted);

}  // namespace holdfast::thermo
