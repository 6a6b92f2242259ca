#include "thermo/equilibrium/states.hpp"

#include <algorithm>
#include <cmath>

#include "thermo/equilibrium/density.hpp"
#include "thermo/equilibrium/stability.hpp"

namespace holdfast::thermo {

namespace {

/// What all lanes of a tile are solved with.
struct Context {
  const Candidate& candidate;
  const Model& model;
  const Composition& z;
  CriticalPoint
      pseudo;         ///< of the pure fluid; of a blend: mole-fraction means of T_c and p_c, and of 1/rho_c
  Validity validity;  ///< of a blend: where all components are valid

  Context(const Candidate& of, const Composition& composition)
      : candidate(of), model(*of.model), z(composition), pseudo{0, 0, 0}, validity{0, 1e300, 1e300} {
    double volume = 0;
    for (int i = 0; i < model.components(); ++i) {
      const ModelComponent& component = model.component(i);
      const double zi = model.isPure() ? 1 : z[static_cast<std::size_t>(i)];
      if (zi == 0) continue;
      pseudo.T += zi * component.critical.T;
      pseudo.p += zi * component.critical.p;
      volume += zi / component.critical.rho;
      validity.T_from = std::max(validity.T_from, component.validity.T_from);
      validity.T_up_to = std::min(validity.T_up_to, component.validity.T_up_to);
      validity.p_up_to = std::min(validity.p_up_to, component.validity.p_up_to);
    }
    pseudo.rho = 1 / volume;
  }
};

/// Takes a lane out: no numbers, harmless placeholders.
void refuse(StateTile& out, int k, Outcome outcome, Reason reason, const Context& context) {
  const auto lane = static_cast<std::size_t>(k);
  out.outcome[lane] = outcome;
  out.reason[lane] = reason;
  out.phase[lane] = Phase::none;
  out.saturated[lane] = false;
  out.T[k] = 1.2 * context.pseudo.T;
  out.p[k] = context.pseudo.p;
  out.rho[k] = out.rho_liquid[k] = out.rho_vapour[k] = 0.1 * context.pseudo.rho;
  out.beta[k] = 0;
}

/// Single phases by T_c and p_c of the candidate. A blend's are pseudo-critical: its liquid and vapour are
/// told apart by the density.
Phase phaseOf(const Context& context, double T, double p, double rho) {
  if (T > context.pseudo.T && p > context.pseudo.p) return Phase::supercritical;
  if (context.model.isPure()) {
    if (T > context.pseudo.T) return Phase::vapour;
    if (p > context.pseudo.p) return Phase::liquid;
  }
  return rho > context.pseudo.rho ? Phase::liquid : Phase::vapour;
}

/// Marks what lies beyond the stated validity, or takes it out.
void applyValidity(const Context& context, BeyondValidity beyond, StateTile& out) {
  for (int k = 0; k < out.count; ++k) {
    if (!out.hasNumbers(k)) continue;
    Reason reason = Reason::none;
    // A saturated state at the very end of the range belongs to it: a part in 1e12 is the rounding of units.
    if (out.T[k] < context.validity.T_from * (1 - 1e-12)) reason = Reason::T_below_validity;
    if (out.T[k] > context.validity.T_up_to * (1 + 1e-12)) reason = Reason::T_above_validity;
    if (out.p[k] > context.validity.p_up_to * (1 + 1e-12)) reason = Reason::p_above_validity;
    if (reason == Reason::none) continue;
    if (beyond == BeyondValidity::refuse) {
      refuse(out, k, Outcome::out_of_range, reason, context);
    } else {
      out.outcome[static_cast<std::size_t>(k)] = Outcome::extrapolated;
      out.reason[static_cast<std::size_t>(k)] = reason;
    }
  }
}

/// Marks a lane as a single phase that was found.
void accept(StateTile& out, int k, Phase phase) {
  const auto lane = static_cast<std::size_t>(k);
  out.outcome[lane] = Outcome::ok;
  out.reason[lane] = Reason::none;
  out.phase[lane] = phase;
  out.saturated[lane] = false;
  out.rho_liquid[k] = out.rho_vapour[k] = out.rho[k];
  out.beta[k] = 0;
}

// ------------------------------------------------------------------------------- pure reference equations at
// (T, p)

/// p_sat(T) near a line's traced part and a little beyond both ends: between the last node and T_c straight
/// in T, below the first one straight in 1/T (Clausius and Clapeyron).
struct Dome {
  double p, rho_liquid, rho_vapour;  ///< estimates
  bool traced;                       ///< T lies on the traced part: an exact solve is possible
};

Dome domeAt(const SaturationCurve& curve, const CriticalPoint& critical, double T) {
  if (T > curve.highestT()) {
    const double share = (T - curve.highestT()) / (critical.T - curve.highestT());
    return {curve.highestP() + share * (critical.p - curve.highestP()), critical.rho, critical.rho, false};
  }
  if (T < curve.lowestT()) {
    const auto end = curve.near(curve.lowestT());
    const auto inside = curve.near(1.01 * curve.lowestT());
    const double slope = std::log(inside.p / end.p) / (1 / curve.lowestT() - 1 / (1.01 * curve.lowestT()));
    const double p = end.p * std::exp(slope * (1 / curve.lowestT() - 1 / T));
    return {p, 0.98 * end.rho_liquid, 2 * end.rho_vapour, false};
  }
  const auto estimate = curve.near(T);
  return {estimate.p, estimate.rho_liquid, estimate.rho_vapour, true};
}

void solveReferenceTp(const Context& context, const InputTile& input, StateTile& out) {
  constexpr double kMargin =
      1e-3;  // of ln p: far above the error of the estimate, far below what a sweep cares to solve twice
  const SaturationCurve& curve = context.candidate.saturation[0];
  const CriticalPoint& critical = context.pseudo;
  const double R = context.model.gasConstant(context.z);
  const double limit = context.model.equation().densityLimit(context.z);
  DensityInput density;
  density.count = input.count;
  for (int k = 0; k < input.count; ++k) {
    const auto lane = static_cast<std::size_t>(k);
    density.T[k] = out.T[k];
    density.p[k] = out.p[k];
    const double T = out.T[k];
    const double p = out.p[k];
    const double ideal = p / (R * T);
    if (T >= critical.T) {
      density.root[lane] = Root::only;
      density.from[k] = 0;
      density.up_to[k] = limit;
      // Ideal where thin; dense states grow with the cube root of p or so.
      density.start[k] = ideal < 0.2 * critical.rho
                             ? ideal
                             : std::min(2.8, std::cbrt(p / critical.p)) * critical.rho * critical.T / T;
      continue;
    }
    Dome dome = domeAt(curve, critical, T);
    double distance = std::log(p / dome.p);
    if (dome.traced && std::abs(distance) < kMargin) {
      SaturationTile exact;
      Row only;
      only[0] = T;
      curve.atT(1, only, exact);
      if (exact.converged[0]) {
        dome.rho_liquid = exact.rho_liquid[0];
        dome.rho_vapour = exact.rho_vapour[0];
        distance = p - exact.p[0];
      }
    }
    if (distance > 0) {
      density.root[lane] = Root::liquid;
      density.from[k] = dome.rho_liquid * (1 - 1e-5);
      density.up_to[k] = limit;
      density.start[k] = dome.rho_liquid;
    } else {
      density.root[lane] = Root::vapour;
      density.from[k] = 0;
      density.up_to[k] = dome.rho_vapour * (1 + 1e-5);
      // Second virial coefficient by the saturated vapour: 1/Z - 1 straight in p.
      const double share = p / dome.p;
      density.start[k] =
          std::min(ideal * (1 + (dome.rho_vapour * R * T / dome.p - 1) * share), dome.rho_vapour);
    }
  }
  DensityTile solved;
  solveDensity(context.model, density, solved);
  for (int k = 0; k < input.count; ++k) {
    const auto lane = static_cast<std::size_t>(k);
    if (!out.hasNumbers(k)) continue;
    if (!solved.converged[lane]) {
      refuse(out, k, Outcome::no_convergence, Reason::solver_failed, context);
      continue;
    }
    out.rho[k] = solved.rho[k];
    Phase phase = phaseOf(context, out.T[k], out.p[k], out.rho[k]);
    if (phase == Phase::liquid || phase == Phase::vapour) {
      if (density.root[lane] == Root::liquid) phase = Phase::liquid;
      if (density.root[lane] == Root::vapour) phase = Phase::vapour;
    }
    accept(out, k, phase);
  }
}

// --------------------------------------------------------------------------------------------- cubic
// equations at (T, p)

/// The root of lowest Gibbs energy, ln rho + r00 + r10 at equal T and p.
double stableRoot(const Context& context, double T, double p) {
  const Cubic::Roots roots = context.candidate.cubic->densities(context.z, T, p);
  if (roots.count == 1) return roots.rho[0];
  Row temperature;
  Row rho;
  temperature.lane.fill(T);
  for (int k = 0; k < kLanes; ++k) rho[k] = roots.rho[static_cast<std::size_t>(std::min(k, roots.count - 1))];
  ResidualTile r;
  context.model.residual(Order::first, roots.count, temperature, rho, context.z, r);
  int best = 0;
  const auto gibbs = [&](int k) { return std::log(rho[k]) + r[r00][k] + r[r10][k]; };
  for (int k = 1; k < roots.count; ++k)
    if (gibbs(k) < gibbs(best)) best = k;
  return rho[best];
}

/// Ends a single-phase state of a cubic at known T, p, rho: a blend must be stable.
void finishCubic(const Context& context, StateTile& out, int k) {
  if (!context.model.isPure()) {
    const Stability found = testStability(*context.candidate.cubic, context.z, out.T[k], out.rho[k]);
    if (found == Stability::unstable) {
      refuse(out, k, Outcome::splits, Reason::unstable_blend, context);
      return;
    }
    if (found == Stability::undecided) {
      refuse(out, k, Outcome::no_convergence, Reason::solver_failed, context);
      return;
    }
  }
  accept(out, k, phaseOf(context, out.T[k], out.p[k], out.rho[k]));
}

// --------------------------------------------------------------------------------------------------------------
// (T, rho)

void pressureOf(const Context& context, StateTile& out) {
  ResidualTile r;
  context.model.residual(Order::first, out.count, out.T, out.rho, context.z, r);
  const double R = context.model.gasConstant(context.z);
  for (int k = 0; k < out.count; ++k) out.p[k] = out.rho[k] * R * out.T[k] * (1 + r[r10][k]);
}

/// A state of two phases or on the dome.
void acceptSaturated(StateTile& out, int k, double beta) {
  const auto lane = static_cast<std::size_t>(k);
  out.outcome[lane] = Outcome::ok;
  out.reason[lane] = Reason::none;
  out.saturated[lane] = true;
  out.beta[k] = beta;
  out.phase[lane] = beta == 0 ? Phase::liquid : beta == 1 ? Phase::vapour : Phase::two_phase;
  out.rho[k] = beta == 0   ? out.rho_liquid[k]
               : beta == 1 ? out.rho_vapour[k]
                           : 1 / ((1 - beta) / out.rho_liquid[k] + beta / out.rho_vapour[k]);
}

void solveTrho(const Context& context, StateTile& out) {
  pressureOf(context, out);
  const double limit = context.model.equation().densityLimit(context.z);
  const bool pure = context.model.isPure();
  SaturationTile exact;
  if (pure) context.candidate.saturation[0].atT(out.count, out.T, exact);
  for (int k = 0; k < out.count; ++k) {
    if (!out.hasNumbers(k)) continue;
    if (out.rho[k] > limit) {
      refuse(out, k, Outcome::out_of_range, Reason::rho_too_high, context);
      continue;
    }
    if (!pure) {
      if (out.p[k] > 0)
        finishCubic(context, out, k);
      else
        refuse(out, k, Outcome::splits, Reason::unstable_blend, context);
      continue;
    }
    const SaturationCurve& curve = context.candidate.saturation[0];
    const bool on_line = out.T[k] >= curve.lowestT() && out.T[k] <= curve.highestT();
    if (on_line && !exact.converged[static_cast<std::size_t>(k)]) {
      refuse(out, k, Outcome::no_convergence, Reason::solver_failed, context);
      continue;
    }
    if (on_line && out.rho[k] < exact.rho_liquid[k] && out.rho[k] > exact.rho_vapour[k]) {
      const double v_liquid = 1 / exact.rho_liquid[k];
      const double beta = (1 / out.rho[k] - v_liquid) / (1 / exact.rho_vapour[k] - v_liquid);
      const double rho = out.rho[k];
      out.rho_liquid[k] = exact.rho_liquid[k];
      out.rho_vapour[k] = exact.rho_vapour[k];
      out.p[k] = exact.p[k];
      acceptSaturated(out, k, beta);
      out.rho[k] = rho;
      continue;
    }
    if (!(out.p[k] > 0)) {  // below the triple temperature: neither gas nor compressed liquid
      refuse(out, k, Outcome::undefined, Reason::no_saturation_at_T, context);
      continue;
    }
    // The last hair below T_c, where the line is not traced: the dome closes like sqrt(T_c - T).
    if (out.T[k] > curve.highestT() && out.T[k] < context.pseudo.T) {
      const auto end = curve.near(curve.highestT());
      const double share = std::sqrt((context.pseudo.T - out.T[k]) / (context.pseudo.T - curve.highestT()));
      if (out.rho[k] < context.pseudo.rho + share * (end.rho_liquid - context.pseudo.rho) &&
          out.rho[k] > context.pseudo.rho + share * (end.rho_vapour - context.pseudo.rho)) {
        refuse(out, k, Outcome::no_convergence, Reason::solver_failed, context);
        continue;
      }
    }
    accept(out, k, phaseOf(context, out.T[k], out.p[k], out.rho[k]));
  }
}

// -------------------------------------------------------------------------------------------------- (T,
// beta), (p, beta)

void solveBeta(const Context& context, const InputTile& input, StateTile& out) {
  const SaturationCurve& curve = context.candidate.saturation[0];
  const bool by_T = input.pair == InputPair::T_beta;
  SaturationTile exact;
  by_T ? curve.atT(input.count, input.first, exact) : curve.atP(input.count, input.first, exact);
  for (int k = 0; k < input.count; ++k) {
    if (!out.hasNumbers(k)) continue;
    const double given = input.first[k];
    const double low = by_T ? curve.lowestT() : curve.lowestP();
    const double critical = by_T ? context.pseudo.T : context.pseudo.p;
    if (given < low || given >= critical) {
      refuse(out, k, Outcome::undefined, by_T ? Reason::no_saturation_at_T : Reason::no_saturation_at_p,
             context);
      continue;
    }
    if (!exact.converged[static_cast<std::size_t>(k)]) {
      refuse(out, k, Outcome::no_convergence, Reason::solver_failed, context);
      continue;
    }
    out.T[k] = exact.T[k];
    out.p[k] = exact.p[k];
    out.rho_liquid[k] = exact.rho_liquid[k];
    out.rho_vapour[k] = exact.rho_vapour[k];
    acceptSaturated(out, k, input.second[k]);
  }
}

/// Refuses what no solver should see. Comparisons are written so that a number that is none fails them.
void checkInput(const Context& context, const InputTile& input, StateTile& out) {
  for (int k = 0; k < input.count; ++k) {
    const double first = input.first[k];
    const double second = input.second[k];
    const bool T_first = input.pair != InputPair::p_beta;
    Reason reason = Reason::none;
    if (!(first > 0) || !std::isfinite(first))
      reason = T_first ? Reason::T_not_positive : Reason::p_not_positive;
    switch (input.pair) {
      case InputPair::T_p:
        if (!(second > 0) || !std::isfinite(second)) reason = Reason::p_not_positive;
        break;
      case InputPair::T_rho:
        if (!(second > 0) || !std::isfinite(second)) reason = Reason::rho_not_positive;
        break;
      case InputPair::T_beta:
      case InputPair::p_beta:
        if (!(second >= 0 && second <= 1)) reason = Reason::beta_outside_0_1;
        break;
    }
    if (reason != Reason::none) refuse(out, k, Outcome::out_of_range, reason, context);
  }
}

}  // namespace

void solveStates(const Candidate& candidate, const Composition& z, BeyondValidity beyond,
                 const InputTile& input, StateTile& out) {
  constexpr Composition kPure{1};
  const Composition& composition = candidate.model->isPure() ? kPure : z;
  const Context context(candidate, composition);
  out.count = input.count;
  for (int k = 0; k < input.count; ++k) {
    out.T[k] = input.first[k];
    out.p[k] = input.pair == InputPair::p_beta ? input.first[k] : input.second[k];
    out.rho[k] = input.second[k];
    accept(out, k, Phase::none);
  }
  checkInput(context, input, out);
  switch (input.pair) {
    case InputPair::T_p:
      if (candidate.cubic == nullptr) {
        solveReferenceTp(context, input, out);
        break;
      }
      for (int k = 0; k < input.count; ++k) {
        if (!out.hasNumbers(k)) continue;
        out.rho[k] = stableRoot(context, out.T[k], out.p[k]);
        finishCubic(context, out, k);
      }
      break;
    case InputPair::T_rho:
      solveTrho(context, out);
      break;
    case InputPair::T_beta:
    case InputPair::p_beta:
      if (candidate.model->isPure()) {
        solveBeta(context, input, out);
        break;
      }
      for (int k = 0; k < input.count; ++k)
        if (out.hasNumbers(k)) refuse(out, k, Outcome::undefined, Reason::two_phase_blend, context);
      break;
  }
  applyValidity(context, beyond, out);
}

}  // namespace holdfast::thermo
