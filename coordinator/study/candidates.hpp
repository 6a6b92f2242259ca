// The candidates of a study: fluids, fixed blends, and lattices of blends.
#pragma once

#include <array>
#include <string>
#include <vector>

#include "coordinator/study/section.hpp"
#include "holdfast.pb.h"
#include "thermo/fluids/library.hpp"

namespace holdfast::coordinator {

/// Steps of a lattice: 1 to this.
inline constexpr std::int64_t kMostLatticeSteps = 1000;
/// Fractions may sum to 1 within this; they are then scaled to sum to 1.
inline constexpr double kFractionSumTolerance = 1e-6;

inline constexpr std::array<std::string_view, 6> kCandidateKeys = {"fluid",        "components", "fractions",
                                                                   "fractions_by", "lattice",    "equation"};

inline constexpr std::array<std::string_view, 3> kEquations = {"reference", "peng-robinson", "soave"};

struct Candidates {
  std::vector<v1::PlannedCandidate> planned;  ///< with unique labels; complete only if nothing was reported
  std::vector<Place> places;                  ///< one a candidate: where to point if it cannot be built
};

/// Reads all [[candidate]] tables. `equation` is the study's, for those that do not say their own.
Candidates readCandidates(const std::vector<Section>& sections, const std::string& equation,
                          const thermo::FluidLibrary& library, Findings& findings);

/// Gives every candidate a label for people, unique in the plan: "R-290", "R-32/R-1234yf (68.9/31.1)" by
/// mass, "R-290/R-600a" for a lattice. A label that two candidates share gets the equation appended, or else
/// more digits, or else a number.
void giveLabels(std::vector<v1::PlannedCandidate>& candidates);

}  // namespace holdfast::coordinator
