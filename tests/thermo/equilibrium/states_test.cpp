// From specification to state: the right root, the right phase, the right outcome.
#include "thermo/equilibrium/states.hpp"

#include <gtest/gtest.h>

#include <cmath>
#include <random>

#include "tests/thermo/equilibrium/equilibrium_support.hpp"

namespace holdfast::thermo::tests {
namespace {

constexpr Composition kPure{1};

double pressureAt(const Candidate& candidate, double T, double rho, double& slope) {
  Row temperature;
  Row density;
  temperature.lane.fill(T);
  density.lane.fill(rho);
  ResidualTile r;
  candidate.model->residual(Order::second, 1, temperature, density, kPure, r);
  slope = 1 + r[r10][0] + r[r20][0];
  return rho * candidate.model->gasConstant(kPure) * T * (1 + r[r10][0]);
}

// p(T, rho) of a random single-phase state, given back as (T, p), returns rho: all equations, tiles of 64
// unrelated states.
TEST(States, DensityComesBackFromItsPressureForEveryReferenceEquation) {
  std::mt19937_64 random(5);
  std::uniform_real_distribution<double> unit(0, 1);
  for (const Fluid& fluid : library().fluids()) {
    if (!fluid.reference) continue;
    const auto candidate = candidateOf({fluid.label()}, EquationFamily::reference);
    const ModelComponent& component = candidate->model->component(0);
    const SaturationCurve& curve = candidate->saturation[0];
    InputTile input;
    input.pair = InputPair::T_p;
    input.count = 0;
    std::array<double, kTile> rho;
    while (input.count < kTile) {
      // A third close to the critical temperature.
      const double T = input.count % 3 == 0
                           ? component.critical.T * (1 + 2e-3 * (unit(random) - 0.5))
                           : component.validity.T_from + unit(random) * (std::min(component.validity.T_up_to,
                                                                                  2 * component.critical.T) -
                                                                         component.validity.T_from);
      const double density = component.critical.rho *
                             (unit(random) < 0.3 ? std::pow(10.0, -6 * unit(random)) : 2.6 * unit(random));
      if (T < curve.lowestT() || (T > curve.highestT() && T < component.critical.T)) continue;
      if (T < component.critical.T) {
        const auto dome = curve.near(T);
        if (density > dome.rho_vapour * 0.9999 && density < dome.rho_liquid * 1.0001) continue;
      }
      double slope = 0;
      const double p = pressureAt(*candidate, T, density, slope);
      if (!(p > 0) || !(slope > 1e-7) || p > component.validity.p_up_to) continue;
      input.first[input.count] = T;
      input.second[input.count] = p;
      rho[static_cast<std::size_t>(input.count++)] = density;
    }
    StateTile out;
    solveStates(*candidate, kPure, BeyondValidity::compute, input, out);
    for (int k = 0; k < kTile; ++k) {
      ASSERT_TRUE(out.hasNumbers(k)) << fluid.label() << " T=" << input.first[k] << " p=" << input.second[k]
                                     << " " << sentenceOf(out.reason[static_cast<std::size_t>(k)]);
      double slope = 0;
      pressureAt(*candidate, input.first[k], rho[static_cast<std::size_t>(k)], slope);
      // p of a cold liquid is a difference of terms some fifty times larger than rho R T, each rounded: 2e-13
      // of rho R T, over the slope.
      EXPECT_NEAR(out.rho[k] / rho[static_cast<std::size_t>(k)], 1, 2e-13 / std::min(slope, 1.0))
          << fluid.label() << " T=" << input.first[k] << " p=" << input.second[k];
    }
  }
}

TEST(States, TheRootBelowSaturationIsVapourAndAboveItLiquid) {
  for (const char* name : {"R-290", "water", "R-717", "R-744", "R-134a"}) {
    const auto candidate = candidateOf({name}, EquationFamily::reference);
    const SaturationCurve& curve = candidate->saturation[0];
    for (const double share : {0.02, 0.3, 0.6, 0.9, 0.99}) {
      Row T;
      T[0] = curve.lowestT() + share * (curve.highestT() - curve.lowestT());
      SaturationTile exact;
      curve.atT(1, T, exact);
      ASSERT_TRUE(exact.converged[0]);
      for (const double off : {1e-9, 1e-6, 1e-3, 0.2}) {
        const auto below = solveOne(*candidate, InputPair::T_p, T[0], exact.p[0] * (1 - off));
        const auto above = solveOne(*candidate, InputPair::T_p, T[0], exact.p[0] * (1 + off));
        EXPECT_EQ(below.phase, Phase::vapour) << name << " " << T[0] << " " << off;
        EXPECT_EQ(above.phase, Phase::liquid) << name << " " << T[0] << " " << off;
        EXPECT_LT(below.rho, exact.rho_vapour[0]);
        EXPECT_GT(above.rho, exact.rho_liquid[0] * (1 - 1e-12));
      }
    }
  }
}

TEST(States, InsideTheDomeDensityAndVapourFractionAreTheSameState) {
  const auto propane = candidateOf({"R-290"}, EquationFamily::reference);
  for (const double T : {120.0, 250.0, 350.0, 369.0})
    for (const double beta : {0.01, 0.4, 0.97}) {
      const auto by_beta = solveOne(*propane, InputPair::T_beta, T, beta);
      ASSERT_EQ(by_beta.outcome, Outcome::ok);
      EXPECT_EQ(by_beta.phase, Phase::two_phase);
      const auto by_rho = solveOne(*propane, InputPair::T_rho, T, by_beta.rho);
      EXPECT_EQ(by_rho.phase, Phase::two_phase);
      EXPECT_NEAR(by_rho.beta, beta, 1e-9);
      EXPECT_NEAR(by_rho.p / by_beta.p, 1, 1e-12);
      const auto by_p = solveOne(*propane, InputPair::p_beta, by_beta.p, beta);
      EXPECT_NEAR(by_p.T / T, 1, 1e-12);
    }
}

TEST(States, AtTheEndsOfTheDomeAStateIsOneSaturatedPhase) {
  const auto propane = candidateOf({"R-290"}, EquationFamily::reference);
  const auto liquid = solveOne(*propane, InputPair::T_beta, 300, 0);
  const auto vapour = solveOne(*propane, InputPair::T_beta, 300, 1);
  EXPECT_EQ(liquid.phase, Phase::liquid);
  EXPECT_EQ(vapour.phase, Phase::vapour);
  EXPECT_TRUE(liquid.saturated && vapour.saturated);
  EXPECT_EQ(liquid.p, vapour.p);
  EXPECT_EQ(solveOne(*propane, InputPair::T_rho, 300, liquid.rho).phase, Phase::liquid);
  EXPECT_EQ(solveOne(*propane, InputPair::T_rho, 300, vapour.rho).phase, Phase::vapour);
}

TEST(States, PhasesAreNamedByTheCriticalPoint) {
  const auto co2 = candidateOf({"R-744"}, EquationFamily::reference);
  EXPECT_EQ(solveOne(*co2, InputPair::T_p, 310, 8e6).phase, Phase::supercritical);
  EXPECT_EQ(solveOne(*co2, InputPair::T_p, 310, 7e6).phase, Phase::vapour);
  EXPECT_EQ(solveOne(*co2, InputPair::T_p, 300, 8e6).phase, Phase::liquid);
  EXPECT_EQ(solveOne(*co2, InputPair::T_p, 300, 6e6).phase, Phase::vapour);
}

TEST(States, EveryOutcomeHasItsReason) {
  const auto propane = candidateOf({"R-290"}, EquationFamily::reference);
  const auto blend = candidateOf({"R-32", "R-1234yf"}, EquationFamily::peng_robinson);
  const Composition half{0.5, 0.5};
  struct Case {
    const Candidate& candidate;
    InputPair pair;
    double first, second;
    BeyondValidity beyond;
    Outcome outcome;
    Reason reason;
  };
  using enum Outcome;
  constexpr auto kCompute = BeyondValidity::compute;
  constexpr auto kRefuse = BeyondValidity::refuse;
  const double nan = std::nan("");
  const Case cases[] = {
      {*propane, InputPair::T_p, 300, 1e6, kRefuse, ok, Reason::none},
      {*propane, InputPair::T_p, 700, 1e6, kCompute, extrapolated, Reason::T_above_validity},
      {*propane, InputPair::T_p, 700, 1e6, kRefuse, out_of_range, Reason::T_above_validity},
      {*propane, InputPair::T_p, 400, 1.5e9, kCompute, extrapolated, Reason::p_above_validity},
      {*propane, InputPair::T_p, 400, 1.5e9, kRefuse, out_of_range, Reason::p_above_validity},
      {*propane, InputPair::T_p, 80, 1e5, kRefuse, out_of_range, Reason::T_below_validity},
      {*propane, InputPair::T_p, -1, 1e5, kCompute, out_of_range, Reason::T_not_positive},
      {*propane, InputPair::T_p, 300, 0, kCompute, out_of_range, Reason::p_not_positive},
      {*propane, InputPair::T_p, 300, nan, kCompute, out_of_range, Reason::p_not_positive},
      {*propane, InputPair::T_rho, 300, -5, kCompute, out_of_range, Reason::rho_not_positive},
      {*propane, InputPair::T_rho, 300, 1e6, kCompute, out_of_range, Reason::rho_too_high},
      {*propane, InputPair::T_beta, 300, 1.1, kCompute, out_of_range, Reason::beta_outside_0_1},
      {*propane, InputPair::T_beta, 400, 0.5, kCompute, undefined, Reason::no_saturation_at_T},
      {*propane, InputPair::T_beta, 50, 0.5, kCompute, undefined, Reason::no_saturation_at_T},
      {*propane, InputPair::p_beta, 5e6, 0.5, kCompute, undefined, Reason::no_saturation_at_p},
      {*blend, InputPair::T_beta, 300, 0.5, kCompute, undefined, Reason::two_phase_blend},
      {*blend, InputPair::T_p, 300, 12e5, kCompute, splits, Reason::unstable_blend},
      {*blend, InputPair::T_rho, 300, 5000, kCompute, splits, Reason::unstable_blend},
  };
  for (const Case& each : cases) {
    const auto state = solveOne(each.candidate, each.pair, each.first, each.second, each.beyond,
                                each.candidate.model->isPure() ? kPure : half);
    EXPECT_EQ(state.outcome, each.outcome) << nameOf(each.pair) << " " << each.first << " " << each.second;
    EXPECT_EQ(state.reason, each.reason) << nameOf(each.pair) << " " << each.first << " " << each.second;
    EXPECT_TRUE(std::isfinite(state.T) && std::isfinite(state.p) && std::isfinite(state.rho));
  }
}

// A lane's bits do not depend on what else is in the tile, as long as its own stretch of neighbours is the
// same.
TEST(States, ALaneDoesNotDependOnTheLaneBesideIt) {
  const auto water = candidateOf({"water"}, EquationFamily::reference);
  InputTile input;
  input.count = kTile;
  input.pair = InputPair::T_p;
  for (int k = 0; k < kTile; ++k) {
    input.first[k] = 300 + 8.0 * k;
    input.second[k] = 1e7;
  }
  StateTile first;
  solveStates(*water, kPure, BeyondValidity::compute, input, first);
  // Other states in every second stretch of eight.
  for (int k = 0; k < kTile; ++k)
    if ((k / 8) % 2 == 1) input.first[k] = 1000 - k;
  StateTile second;
  solveStates(*water, kPure, BeyondValidity::compute, input, second);
  for (int k = 0; k < kTile; ++k)
    if ((k / 8) % 2 == 0) {
      EXPECT_EQ(first.rho[k], second.rho[k]) << k;
    }
}

// Saturation pressures and densities of IAPWS R6-95(2018), Table 8 (from memory).
TEST(States, WaterOnTheSaturationLineIsThatOfTheRelease) {
  const auto water = candidateOf({"water"}, EquationFamily::reference);
  struct Printed {
    double T, p_MPa, rho_liquid, rho_vapour;
  };
  const double M = water->model->component(0).M;
  for (const Printed& row : {Printed{275, 0.698451167e-3, 0.999887406e3, 0.550664919e-2},
                             Printed{450, 0.932203564, 0.890341250e3, 0.481200360e1},
                             Printed{625, 0.169082693e2, 0.567090385e3, 0.118290280e3}}) {
    const auto liquid = solveOne(*water, InputPair::T_beta, row.T, 0);
    const auto vapour = solveOne(*water, InputPair::T_beta, row.T, 1);
    EXPECT_NEAR(liquid.p / 1e6 / row.p_MPa, 1, 1e-8);
    EXPECT_NEAR(liquid.rho * M / row.rho_liquid, 1, 1e-8);
    EXPECT_NEAR(vapour.rho * M / row.rho_vapour, 1, 1e-8);
  }
}

}  // namespace
}  // namespace holdfast::thermo::tests
