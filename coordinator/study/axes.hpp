// The axes of a study: what is swept, and through which values.
#pragma once

#include <array>
#include <vector>

#include "coordinator/study/section.hpp"
#include "holdfast.pb.h"

namespace holdfast::coordinator {

/// Most values of one axis: a plan travels with all of them.
inline constexpr std::int64_t kMostAxisValues = 100'000;

inline constexpr std::array<std::string_view, 6> kAxisKeys = {"quantity", "from",    "to",
                                                              "count",    "spacing", "values"};

/// What the axes of a study are, as far as they can be read.
struct Axes {
  std::vector<v1::PlannedAxis> planned;  ///< complete only if nothing was reported
  std::vector<Place> places;             ///< one an axis
  bool sweeps(std::string_view quantity) const;
};

/// Reads all [[axis]] tables. Reports also what is wrong with them together: not one of the pairs T,p | T,rho
/// | T,beta | p,beta.
Axes readAxes(const std::vector<Section>& sections, v1::Basis basis, Findings& findings);

}  // namespace holdfast::coordinator
