// Candidates of the tests, and single states.
#pragma once

#include <memory>
#include <stdexcept>
#include <string>
#include <vector>

#include "thermo/equilibrium/states.hpp"

namespace holdfast::thermo::tests {

inline const FluidLibrary& library() {
  static const Result<FluidLibrary> loaded = FluidLibrary::load(HOLDFAST_SOURCE_DIR "/thermo/fluids/data");
  if (!loaded) throw std::runtime_error(loaded.error().message);
  return *loaded;
}

inline std::shared_ptr<const Candidate> candidateOf(const std::vector<std::string>& components,
                                                    EquationFamily family) {
  CandidateSpec spec;
  spec.components = components;
  spec.equation = family;
  auto made = makeCandidate(library(), spec);
  if (!made) throw std::runtime_error(made.error().message);
  return *made;
}

/// One state in a tile of one.
struct OneState {
  Phase phase;
  Outcome outcome;
  Reason reason;
  bool saturated;
  double T, p, rho, beta;
};

inline OneState solveOne(const Candidate& candidate, InputPair pair, double first, double second,
                         BeyondValidity beyond = BeyondValidity::compute, const Composition& z = {1}) {
  InputTile input;
  input.count = 1;
  input.pair = pair;
  input.first[0] = first;
  input.second[0] = second;
  StateTile out;
  solveStates(candidate, z, beyond, input, out);
  return {out.phase[0], out.outcome[0], out.reason[0], out.saturated[0],
          out.T[0],     out.p[0],       out.rho[0],    out.beta[0]};
}

}  // namespace holdfast::thermo::tests
