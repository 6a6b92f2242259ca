#include "thermo/equilibrium/candidate.hpp"

#include <algorithm>

#include "thermo/equations/reference.hpp"
#include "thermo/equilibrium/critical.hpp"

namespace holdfast::thermo {

namespace {

constexpr double kCubicR = 8.31446261815324;  // J/(mol K), exact since 2019

std::string inQuotes(std::string_view text) {
  return "\"" + std::string(text) + "\"";
}

/// A pure fluid with its line and its constants fixed.
struct Pure {
  std::shared_ptr<const Model> model;
  SaturationCurve curve;
  ReferenceUsed used;
};

Result<Pure> fixed(std::shared_ptr<const Equation> equation, ModelComponent component,
                   const IdealHeatCapacity& cp0, const ReferenceState& reference) {
  const auto loose =
      std::make_shared<const Model>(std::move(equation), std::vector<ModelComponent>{std::move(component)},
                                    std::vector<IdealPart>{IdealPart(cp0)});
  auto curve = SaturationCurve::trace(loose);
  if (!curve) return curve.error();
  auto reference_fixed = fixReference(loose, *curve, reference);
  if (!reference_fixed) return reference_fixed.error();
  // The line does not depend on the constants: it stays as traced.
  return Pure{reference_fixed->model, *curve, reference_fixed->used};
}

Result<Pure> pureReference(const FluidLibrary& library, const Fluid& fluid, const ReferenceState& wanted) {
  const ReferenceFluid& reference = library.references()[*fluid.reference];
  auto equation = std::make_shared<const ReferenceEquation>(reference.equation);
  const auto critical =
      findCriticalPoint(*equation, {reference.T_critical, reference.p_critical, reference.rho_critical});
  if (!critical) return Error{fluid.label() + ": " + critical.error().message};
  ModelComponent component;
  component.designation = fluid.label();
  component.M = reference.M;
  component.critical = *critical;
  component.acentric_factor = fluid.acentric_factor.value_or(0.3);  // starting values only
  component.T_triple = std::max(reference.T_triple.value_or(0), reference.T_from);
  component.T_boil = reference.T_boil.value_or(0);
  component.validity = {reference.T_from, reference.T_up_to, reference.p_up_to};
  return fixed(std::move(equation), std::move(component), reference.ideal, wanted);
}

CubicComponent cubicOf(const Fluid& fluid) {
  return {fluid.T_critical, fluid.p_critical, *fluid.acentric_factor};
}

/// A cubic equation has no published range. What is stated: from the melting point (where it is not known,
/// 0.4 T_c) to 1000 K or 3 T_c, whichever is less, and up to 100 MPa, beyond which its liquid densities are
/// of no use (common practice).
ModelComponent cubicComponent(const Fluid& fluid, CubicFamily family) {
  ModelComponent component;
  component.designation = fluid.label();
  component.M = fluid.M;
  const double Zc = Cubic::criticalCompressibility(family);
  component.critical = {fluid.T_critical, fluid.p_critical,
                        fluid.p_critical / (Zc * kCubicR * fluid.T_critical)};
  component.acentric_factor = *fluid.acentric_factor;
  component.T_triple = fluid.T_melt.value_or(0.4 * fluid.T_critical);
  component.T_boil = fluid.T_boil.value_or(0);
  component.validity = {component.T_triple, std::min(1000.0, 3 * fluid.T_critical), 100e6};
  return component;
}

Result<Pure> pureCubic(const Fluid& fluid, CubicFamily family, const ReferenceState& wanted) {
  auto equation = std::make_shared<const Cubic>(family, std::vector<CubicComponent>{cubicOf(fluid)},
                                                std::vector<std::vector<double>>{{0.0}});
  return fixed(std::move(equation), cubicComponent(fluid, family), *fluid.ideal, wanted);
}

Result<std::vector<const Fluid*>> findAll(const FluidLibrary& library, const CandidateSpec& spec) {
  if (spec.components.empty() || spec.components.size() > kMostComponents)
    return Error{"a candidate has 1 to " + std::to_string(kMostComponents) + " components"};
  std::vector<const Fluid*> fluids;
  for (const std::string& name : spec.components) {
    const auto found = library.find(name);
    if (!found) return found.error();
    if (std::find(fluids.begin(), fluids.end(), *found) != fluids.end())
      return Error{inQuotes((*found)->label()) + " stands twice in one blend"};
    fluids.push_back(*found);
  }
  return fluids;
}

Status hasEquation(const Fluid& fluid, EquationFamily family) {
  const bool cubic = fluid.acentric_factor.has_value();
  if (family == EquationFamily::reference && !fluid.reference)
    return Error{inQuotes(fluid.label()) + " has no reference equation" +
                 (cubic ? "; \"peng-robinson\" and \"soave\" are available" : "")};
  if (family != EquationFamily::reference && !cubic)
    return Error{inQuotes(fluid.label()) +
                 " has no acentric factor for a cubic equation; \"reference\" is available"};
  if (!fluid.ideal) return Error{inQuotes(fluid.label()) + " has no ideal-gas heat capacity"};
  return success();
}

Result<std::shared_ptr<const Candidate>> cubicBlend(const FluidLibrary& library,
                                                    const std::vector<const Fluid*>& fluids,
                                                    const CandidateSpec& spec, CubicFamily family) {
  auto candidate = std::make_shared<Candidate>();
  candidate->family = spec.equation;
  std::vector<CubicComponent> cubic;
  std::vector<ModelComponent> components;
  std::vector<IdealPart> ideal;
  std::vector<std::vector<double>> kij(fluids.size(), std::vector<double>(fluids.size(), 0.0));
  std::vector<std::string> kinds;
  for (std::size_t i = 0; i < fluids.size(); ++i) {
    auto pure = pureCubic(*fluids[i], family, spec.reference_state);
    if (!pure) return pure.error();
    candidate->designations.push_back(fluids[i]->label());
    candidate->reference_used.push_back(pure->used);
    components.push_back(pure->model->component(0));
    ideal.push_back(pure->model->idealPart(0));
    cubic.push_back(cubicOf(*fluids[i]));
    for (std::size_t j = 0; j < i; ++j) {
      BinaryInteraction pair = library.interaction(*fluids[i], *fluids[j]);
      if (family == CubicFamily::soave)
        pair = {0, "prediction", "kij of Soave's equation are not known here"};
      kij[i][j] = kij[j][i] = pair.kij;
      if (std::find(kinds.begin(), kinds.end(), pair.kind) == kinds.end()) kinds.push_back(pair.kind);
    }
  }
  for (const std::string& kind : kinds)
    candidate->data_kind += (candidate->data_kind.empty() ? "" : "; ") + kind;
  candidate->cubic = std::make_shared<const Cubic>(family, std::move(cubic), std::move(kij));
  candidate->model = std::make_shared<const Model>(candidate->cubic, std::move(components), std::move(ideal));
  return std::shared_ptr<const Candidate>(std::move(candidate));
}

}  // namespace

std::string_view nameOf(EquationFamily family) {
  switch (family) {
    case EquationFamily::reference:
      return "reference";
    case EquationFamily::peng_robinson:
      return "peng-robinson";
    case EquationFamily::soave:
      return "soave";
  }
  return "";
}

std::optional<EquationFamily> equationFamilyOf(std::string_view name) {
  for (const auto family : {EquationFamily::reference, EquationFamily::peng_robinson, EquationFamily::soave})
    if (nameOf(family) == name) return family;
  return std::nullopt;
}

Result<std::shared_ptr<const Candidate>> makeCandidate(const FluidLibrary& library,
                                                       const CandidateSpec& spec) {
  const auto fluids = findAll(library, spec);
  if (!fluids) return fluids.error();
  if (fluids->size() > 1 && spec.equation == EquationFamily::reference)
    return Error{"blends of reference equations are not available yet; \"peng-robinson\" and \"soave\" are"};
  for (const Fluid* fluid : *fluids)
    if (Status has = hasEquation(*fluid, spec.equation); !has) return has.error();

  const auto family =
      spec.equation == EquationFamily::soave ? CubicFamily::soave : CubicFamily::peng_robinson;
  if (fluids->size() > 1) return cubicBlend(library, *fluids, spec, family);

  const Fluid& fluid = *fluids->front();
  auto pure = spec.equation == EquationFamily::reference ? pureReference(library, fluid, spec.reference_state)
                                                         : pureCubic(fluid, family, spec.reference_state);
  if (!pure) return pure.error();
  auto candidate = std::make_shared<Candidate>();
  candidate->designations = {fluid.label()};
  candidate->family = spec.equation;
  candidate->model = pure->model;
  candidate->cubic = std::dynamic_pointer_cast<const Cubic>(pure->model->sharedEquation());
  candidate->saturation = {pure->curve};
  candidate->reference_used = {pure->used};
  candidate->data_kind = "pure";
  return std::shared_ptr<const Candidate>(std::move(candidate));
}

}  // namespace holdfast::thermo
