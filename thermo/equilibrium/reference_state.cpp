#include "thermo/equilibrium/reference_state.hpp"

#include <cmath>

namespace holdfast::thermo {

namespace {

constexpr Composition kPure{1};
constexpr double kAtmosphere = 101325;  // Pa

}  // namespace

Result<FixedReference> fixReference(const std::shared_ptr<const Model>& model, const SaturationCurve& curve,
                                    const ReferenceState& wanted) {
  const ModelComponent& component = model->component(0);
  FixedReference out;
  out.used.h = wanted.h;
  out.used.s = wanted.s;

  SaturationTile saturated;
  Row given;
  if (wanted.T >= component.critical.T) {
    out.used.state = "normal-boiling liquid";
    given.lane.fill(kAtmosphere);
    curve.atP(1, given, saturated);
  } else {
    const bool triple = wanted.T < curve.lowestT();
    out.used.state = triple ? "triple-point liquid" : "saturated liquid";
    given.lane.fill(triple ? curve.lowestT() : wanted.T);
    curve.atT(1, given, saturated);
  }
  if (!saturated.converged[0])
    return Error{component.designation + " has no " + out.used.state + " to fix h and s at"};
  out.used.T = saturated.T[0];

  JetTile jet;
  model->jets(Order::first, 1, saturated.T, saturated.rho_liquid, kPure, jet);
  const double R = jet.R;
  const double T = saturated.T[0];
  const double energy = jet.ideal[i_u][0] + jet.residual[r01][0];
  const double h = R * T * (1 + energy + jet.residual[r10][0]);
  const double s =
      R * (energy - jet.ideal[i_f][0] - std::log(saturated.rho_liquid[0]) - jet.residual[r00][0]);
  const IdealConstants shift{(wanted.h * component.M - h) / R, (wanted.s * component.M - s) / R};
  out.model = std::make_shared<const Model>(model->sharedEquation(), std::vector<ModelComponent>{component},
                                            std::vector<IdealPart>{model->idealPart(0).shifted(shift)});
  return out;
}

}  // namespace holdfast::thermo
