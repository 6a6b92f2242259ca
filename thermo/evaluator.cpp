#include "thermo/evaluator.hpp"

#include <algorithm>

namespace holdfast::thermo {

namespace {

/// Lanes that are computed together: same surface, phase and saturation.
struct Group {
  Phase phase;
  bool saturated;
  int count = 0;
  std::array<int, kTile> lane;
};

/// The states of a group side by side.
struct Gathered {
  Row T, p, rho, beta, rho_liquid, rho_vapour;
};

void gather(const StateTile& states, const Group& group, Gathered& out) {
  for (int k = 0; k < group.count; ++k) {
    const int lane = group.lane[static_cast<std::size_t>(k)];
    out.T[k] = states.T[lane];
    out.p[k] = states.p[lane];
    out.rho[k] = states.rho[lane];
    out.beta[k] = states.beta[lane];
    out.rho_liquid[k] = states.rho_liquid[lane];
    out.rho_vapour[k] = states.rho_vapour[lane];
  }
}

/// Scratch of one thread: an evaluation allocates nothing once it is warm.
struct Scratch {
  JetTile jet;
  GradientTile overall, liquid, vapour;
  Columns::Out columns;
};

}  // namespace

Evaluator::Evaluator(std::shared_ptr<const Candidate> candidate, std::vector<ColumnExpression> columns,
                     Basis basis, BeyondValidity beyond)
    : candidate_(std::move(candidate)),
      columns_(std::move(columns), basis, candidate_->designations),
      beyond_(beyond) {}

void Evaluator::evaluate(const InputTile& input, const Composition& z, ColumnTile& out) const {
  static thread_local Scratch scratch;
  constexpr Composition kPure{1};
  const Model& model = *candidate_->model;
  const Composition& composition = model.isPure() ? kPure : z;
  StateTile states;
  solveStates(*candidate_, composition, beyond_, input, states);

  out.count = input.count;
  std::copy_n(states.phase.begin(), input.count, out.phase.begin());
  std::copy_n(states.outcome.begin(), input.count, out.outcome.begin());
  std::copy_n(states.reason.begin(), input.count, out.reason.begin());
  const auto columns = static_cast<std::size_t>(columns_.count());
  out.columns.value.resize(columns);
  out.columns.reason.resize(columns);

  std::array<bool, kTile> taken{};
  for (int first = 0; first < input.count; ++first) {
    if (taken[static_cast<std::size_t>(first)] || !states.hasNumbers(first)) continue;
    Group group{states.phase[static_cast<std::size_t>(first)],
                states.saturated[static_cast<std::size_t>(first)],
                0,
                {}};
    for (int k = first; k < input.count; ++k) {
      const auto lane = static_cast<std::size_t>(k);
      if (taken[lane] || !states.hasNumbers(k) || states.phase[lane] != group.phase ||
          states.saturated[lane] != group.saturated)
        continue;
      taken[lane] = true;
      group.lane[static_cast<std::size_t>(group.count++)] = k;
    }
    Gathered at;
    gather(states, group, at);
    ColumnSource source;
    source.count = group.count;
    source.phase = group.phase;
    source.z = composition.data();
    source.overall = &scratch.overall;
    if (group.saturated) {
      model.jets(Order::second, group.count, at.T, at.rho_liquid, composition, scratch.jet);
      gradientsOf(scratch.jet, scratch.liquid);
      model.jets(Order::second, group.count, at.T, at.rho_vapour, composition, scratch.jet);
      gradientsOf(scratch.jet, scratch.vapour);
      source.liquid = &scratch.liquid;
      source.vapour = &scratch.vapour;
      source.beta = &at.beta;
      if (group.phase == Phase::two_phase) {
        at.beta.fill(group.count);
        hullOf(scratch.liquid, scratch.vapour, at.beta, scratch.overall);
      } else {
        scratch.overall = group.phase == Phase::liquid ? scratch.liquid : scratch.vapour;
      }
    } else {
      model.jets(Order::second, group.count, at.T, at.rho, composition, scratch.jet);
      gradientsOf(scratch.jet, scratch.overall);
    }
    // The pressure is the one asked for or p_sat: a cold liquid's jet cannot resolve it.
    scratch.overall[Base::p].value = at.p;

    const bool whole = group.count == input.count;
    Columns::Out& target = whole ? out.columns : scratch.columns;
    columns_.evaluate(source, target);
    if (whole) return;
    for (std::size_t c = 0; c < columns; ++c)
      for (int k = 0; k < group.count; ++k) {
        const int lane = group.lane[static_cast<std::size_t>(k)];
        out.columns.value[c][lane] = target.value[c][k];
        out.columns.reason[c][static_cast<std::size_t>(lane)] = target.reason[c][static_cast<std::size_t>(k)];
      }
  }
}

}  // namespace holdfast::thermo
