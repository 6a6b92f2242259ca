// What the point numbers of a plan mean: shared by the coordinator (who stores axis values) and the workers
// (who compute).
//
//   point = ((composition_before(candidate) + composition) * product of axis counts) + axis index in
//   row-major order, last axis fastest
#pragma once

#include <cstdint>
#include <vector>

#include "holdfast.pb.h"

namespace holdfast::plan {

/// Points of one composition that stand side by side.
struct Run {
  std::uint32_t candidate = 0;    ///< index into Plan.candidates
  std::uint64_t composition = 0;  ///< counted through the whole plan: the store's composition.id
  std::uint64_t composition_of_candidate = 0;
  std::uint64_t first_point = 0;
  std::uint64_t points = 0;
};

/// Immutable view of a plan's numbering. Keeps a reference to the plan, which must outlive it. Counts that do
/// not fit into 64 bits stay at the largest number; a plan whose axes have no values has no points.
class Points {
 public:
  explicit Points(const v1::Plan& plan);

  std::uint64_t count() const;         ///< all points
  std::uint64_t compositions() const;  ///< all compositions
  std::uint64_t compositionsOf(std::uint32_t candidate) const;
  std::uint64_t perComposition() const;  ///< product of the axes' counts

  /// Cuts [first, first + points) where the composition changes. What lies beyond the last point is left out.
  std::vector<Run> runs(std::uint64_t first, std::uint64_t points) const;

  /// SI values of axis `axis` at point numbers first.. (points of them, all inside the plan), into out.
  void axisValues(int axis, std::uint64_t first, std::uint64_t points, double* out) const;

  /// Mole fractions of a composition of a candidate (lattice by mass converted with the plan's molar masses);
  /// 0 <= composition_of_candidate < compositionsOf(candidate).
  std::vector<double> moleFractions(std::uint32_t candidate, std::uint64_t composition_of_candidate) const;

 private:
  const v1::Plan& plan_;
  std::vector<std::uint64_t> composition_before_;
  std::uint64_t per_composition_ = 1;
};

}  // namespace holdfast::plan
