// A candidate ready to compute: a fluid or blend with its equation, reference state and saturation lines.
#pragma once

#include <memory>
#include <string>
#include <string_view>
#include <vector>

#include "thermo/equations/cubic.hpp"
#include "thermo/equations/model.hpp"
#include "thermo/equilibrium/reference_state.hpp"
#include "thermo/equilibrium/saturation.hpp"
#include "thermo/fluids/library.hpp"
#include "thermo/result.hpp"

namespace holdfast::thermo {

/// The equations a study may ask for, by the names it uses.
enum class EquationFamily { reference, peng_robinson, soave };
std::string_view nameOf(EquationFamily family);  ///< "reference" | "peng-robinson" | "soave"
std::optional<EquationFamily> equationFamilyOf(std::string_view name);

/// What a candidate is made of.
struct CandidateSpec {
  std::vector<std::string> components;  ///< as FluidLibrary::find takes them, 1..kMostComponents
  EquationFamily equation = EquationFamily::reference;
  ReferenceState reference_state;
};

/// Immutable after construction: safe from many threads.
struct Candidate {
  std::vector<std::string> designations;  ///< labels of the components
  EquationFamily family = EquationFamily::reference;
  std::shared_ptr<const Model> model;         ///< of the whole candidate, constants fixed
  std::shared_ptr<const Cubic> cubic;         ///< its equation where the family is cubic, else null
  std::vector<SaturationCurve> saturation;    ///< of a pure candidate: one; of a blend: empty
  std::vector<ReferenceUsed> reference_used;  ///< one a component
  std::string data_kind;  ///< where the data of pairs come from: "pure", or the kinds of its kij:
                          ///< "published", "regressed", "prediction"...
};

/// Builds it. Fails with a sentence if a component is unknown, has no equation of this family (never a silent
/// fallback), no ideal heat capacity, or if a blend of reference equations is asked for (not available yet).
Result<std::shared_ptr<const Candidate>> makeCandidate(const FluidLibrary& library,
                                                       const CandidateSpec& spec);

}  // namespace holdfast::thermo
