// Candidates of the tests, each with its 50-digit twin written from the same published data.
#pragma once

#include <memory>
#include <string>
#include <vector>

#include "tests/support/oracle.hpp"
#include "thermo/equilibrium/candidate.hpp"
#include "thermo/fluids/library.hpp"

namespace holdfast::thermo::tests {

/// The data of the build tree, read once.
const FluidLibrary& library();

/// A candidate at one composition and the truth about it.
struct Subject {
  std::string label;
  std::shared_ptr<const Candidate> candidate;
  Composition z{};
  oracle::Fluid truth;
};

/// Fails the test (throws) if the candidate cannot be built.
Subject subjectOf(const std::vector<std::string>& components, const std::vector<double>& z,
                  EquationFamily family);

/// Sixteen candidates: every kind of term of the reference equations, both cubic families, a binary and a
/// ternary blend.
std::vector<Subject> subjects();

/// A random single-phase-equation state: T within the fluid's range, reduced density from `lowest` to the
/// compressed liquid, never where the equation is mechanically unstable (p_rho <= 0).
struct StatePoint {
  double T;    ///< K
  double rho;  ///< mol/m3
};
std::vector<StatePoint> randomStates(const Subject& subject, int count, double lowest, unsigned seed);

}  // namespace holdfast::thermo::tests
