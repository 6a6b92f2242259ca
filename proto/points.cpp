#include "proto/points.hpp"

#include <algorithm>
#include <cassert>
#include <limits>

namespace holdfast::plan {
namespace {

// Counts that do not fit into 64 bits stay at the largest number: a limit on points then refuses them.
constexpr std::uint64_t kMost = std::numeric_limits<std::uint64_t>::max();

std::uint64_t times(std::uint64_t a, std::uint64_t b) {
  return b != 0 && a > kMost / b ? kMost : a * b;
}

std::uint64_t plus(std::uint64_t a, std::uint64_t b) {
  return a > kMost - b ? kMost : a + b;
}

/// Ways to share `steps` equal parts among `components`: C(steps + components - 1, components - 1).
std::uint64_t latticeCount(std::uint64_t steps, std::uint64_t components) {
  if (components == 0) return 0;
  std::uint64_t count = 1;
  for (std::uint64_t i = 1; i < components; ++i) {
    // count * (steps + i) / i, whole at every turn; divided first so that only the result must fit.
    const std::uint64_t quotient = count / i, remainder = count % i;
    count = plus(times(quotient, steps + i), times(remainder, steps + i) / i);
  }
  return count;
}

}  // namespace

Points::Points(const v1::Plan& plan) : plan_(plan) {
  for (const auto& axis : plan.axes())
    per_composition_ = times(per_composition_, static_cast<std::uint64_t>(axis.values_size()));
  composition_before_.reserve(static_cast<std::size_t>(plan.candidates_size()) + 1);
  composition_before_.push_back(0);
  for (const auto& candidate : plan.candidates()) {
    const std::uint64_t compositions =
        candidate.has_lattice() ? latticeCount(candidate.lattice().steps(),
                                               static_cast<std::uint64_t>(candidate.components_size()))
                                : 1;
    composition_before_.push_back(plus(composition_before_.back(), compositions));
  }
}

std::uint64_t Points::count() const {
  return times(compositions(), per_composition_);
}

std::uint64_t Points::compositions() const {
  return composition_before_.back();
}

std::uint64_t Points::compositionsOf(std::uint32_t candidate) const {
  return composition_before_[candidate + 1] - composition_before_[candidate];
}

std::uint64_t Points::perComposition() const {
  return per_composition_;
}

std::vector<Run> Points::runs(std::uint64_t first, std::uint64_t points) const {
  const std::uint64_t end = std::min(plus(first, points), count());
  std::vector<Run> runs;
  while (first < end) {
    Run run;
    run.composition = first / per_composition_;
    // The candidate is the last one that starts at or before this composition (one without any starts where
    // the next does).
    const auto next =
        std::upper_bound(composition_before_.begin(), composition_before_.end(), run.composition);
    run.candidate = static_cast<std::uint32_t>(next - composition_before_.begin() - 1);
    run.composition_of_candidate = run.composition - composition_before_[run.candidate];
    run.first_point = first;
    run.points = std::min(end - first, per_composition_ - first % per_composition_);
    first += run.points;
    runs.push_back(run);
  }
  return runs;
}

void Points::axisValues(int axis, std::uint64_t first, std::uint64_t points, double* out) const {
  const auto& values = plan_.axes(axis).values();
  const auto count = static_cast<std::uint64_t>(values.size());
  std::uint64_t stride = 1;  // points over which this axis stands still
  for (int later = axis + 1; later < plan_.axes_size(); ++later)
    stride = times(stride, static_cast<std::uint64_t>(plan_.axes(later).values_size()));
  assert(stride != 0 && count != 0);  // a plan with points has no empty axis
  std::uint64_t done = 0;
  while (done < points) {
    const std::uint64_t point = first + done;
    const std::uint64_t alike = std::min(points - done, stride - point % stride);
    std::fill_n(out + done, alike, values[static_cast<int>(point / stride % count)]);
    done += alike;
  }
}

std::vector<double> Points::moleFractions(std::uint32_t candidate,
                                          std::uint64_t composition_of_candidate) const {
  const auto& planned = plan_.candidates(static_cast<int>(candidate));
  if (planned.has_fixed())
    return {planned.fixed().mole_fraction().begin(), planned.fixed().mole_fraction().end()};
  const int components = planned.components_size();
  if (!planned.has_lattice())
    return std::vector<double>(static_cast<std::size_t>(components), 1.0 / components);

  assert(composition_of_candidate < compositionsOf(candidate));
  const std::uint32_t steps = planned.lattice().steps();
  std::vector<double> fraction(static_cast<std::size_t>(components));
  std::uint64_t left = steps;
  for (int i = 0; i < components; ++i) {
    std::uint64_t share = left;
    if (i + 1 < components) {
      // Skips the compositions with a smaller share here: each leaves the rest to the components that follow.
      const auto following = static_cast<std::uint64_t>(components - i - 1);
      for (share = 0; share < left; ++share) {
        const std::uint64_t with_this_share = latticeCount(left - share, following);
        if (composition_of_candidate < with_this_share) break;
        composition_of_candidate -= with_this_share;
      }
    }
    fraction[static_cast<std::size_t>(i)] = static_cast<double>(share) / steps;
    left -= share;
  }
  if (planned.lattice().by_mass()) {
    double moles = 0;  // per kg of blend
    for (int i = 0; i < components; ++i)
      moles += fraction[static_cast<std::size_t>(i)] /= planned.molar_mass(i);
    for (double& x : fraction) x /= moles;
  }
  return fraction;
}

}  // namespace holdfast::plan
