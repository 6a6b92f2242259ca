// The algebra on surfaces whose answers stand in every textbook: the ideal gas and the gas of van der Waals.
// Hulls: hull_test.cpp.
#include "thermo/jet/columns.hpp"

#include <gtest/gtest.h>

#include <cmath>

#include "tests/thermo/jet/closed_surfaces.hpp"

namespace holdfast::thermo {
namespace {

TEST(IdealGas, HasTheDerivativesOfPvEqualsRT) {
  const double T = 310;
  const double rho = 55;
  const JetTile gas = vanDerWaals(T, rho, 0, 0);
  const double p = rho * kR * T;
  EXPECT_DOUBLE_EQ(valueOf("p", gas), p);
  EXPECT_DOUBLE_EQ(valueOf("cv", gas), 3 * kR);
  EXPECT_DOUBLE_EQ(valueOf("cp", gas), 4 * kR);
  EXPECT_DOUBLE_EQ(valueOf("Z", gas), 1);
  EXPECT_DOUBLE_EQ(valueOf("alpha_v", gas), 1 / T);
  EXPECT_DOUBLE_EQ(valueOf("kappa_T", gas), 1 / p);
  EXPECT_NEAR(valueOf("kappa_s", gas), 3.0 / 4 / p, 1e-15 / p);
  EXPECT_NEAR(valueOf("w", gas), std::sqrt(4.0 / 3 * kR * T / 0.04), 1e-12);
  EXPECT_EQ(valueOf("mu_JT", gas), 0);
  EXPECT_EQ(valueOf("(dh/dp)_T", gas), 0);
  EXPECT_EQ(valueOf("(du/dv)_T", gas), 0);
  EXPECT_NEAR(valueOf("(dT/dp)_s", gas), T / (4 * p), 1e-15);
  EXPECT_NEAR(valueOf("(ds/dp)_T", gas), -kR / p, 1e-18);
  EXPECT_NEAR(valueOf("(dg/dT)_p", gas), -valueOf("s", gas), 1e-12);
  EXPECT_NEAR(valueOf("(dg/dp)_T", gas), 1 / rho, 1e-16);
  EXPECT_NEAR(valueOf("(da/dv)_T", gas), -p, 1e-9);
}

TEST(VanDerWaalsGas, HasItsTextbookDerivatives) {
  const double T = 400;
  const double rho = 3000;
  const double v = 1 / rho;
  const double a = 0.9;
  const double b = 9e-5;
  const JetTile gas = vanDerWaals(T, rho, a, b);
  const double p_T = kR / (v - b);
  const double p_v = -kR * T / std::pow(v - b, 2) + 2 * a / std::pow(v, 3);
  EXPECT_NEAR(valueOf("p", gas), kR * T / (v - b) - a / (v * v), 1e-6);
  EXPECT_NEAR(valueOf("(du/dv)_T", gas), a / (v * v), 1e-14 * a / (v * v));
  EXPECT_NEAR(valueOf("(dp/dT)_v", gas), p_T, 1e-13 * p_T);
  EXPECT_NEAR(valueOf("(dp/dv)_T", gas), p_v, 1e-13 * std::abs(p_v));
  EXPECT_NEAR(valueOf("cp", gas), 3 * kR - T * p_T * p_T / p_v, 1e-11);
  EXPECT_NEAR(valueOf("(dT/dv)_u", gas), -a / (v * v) / (3 * kR), 1e-8);
  // Joule and Thomson: mu = -(1/cp) [v + T p_T/p_v]
  const double cp = 3 * kR - T * p_T * p_T / p_v;
  EXPECT_NEAR(valueOf("mu_JT", gas), -(v + T * p_T / p_v) / cp, 1e-13 * v / cp);
}

TEST(VanDerWaalsGas, ThinnedATrillionfoldKeepsTheDigitsOfItsVirialCoefficient) {
  const double T = 300;
  const double a = 0.9;
  const double b = 9e-5;
  // (dh/dp)_T -> B - T dB/dT with B = b - a/(RT), the next term is of order rho.
  const double limit = b - 2 * a / (kR * T);
  for (const double rho : {1e-9, 1e-12, 1e-15})
    EXPECT_NEAR(valueOf("(dh/dp)_T", vanDerWaals(T, rho, a, b)), limit, 1e-12 * std::abs(limit));
}

TEST(MassBasis, DividesByTheMolarMassOnce) {
  const JetTile gas = vanDerWaals(350, 800, 0.9, 9e-5);
  EXPECT_DOUBLE_EQ(valueOf("rho", gas, Basis::mass), 800 * 0.04);
  EXPECT_NEAR(valueOf("h", gas, Basis::mass) * 0.04 / valueOf("h", gas), 1, 1e-15);
  EXPECT_NEAR(valueOf("(dh/dp)_T", gas, Basis::mass) * 0.04 / valueOf("(dh/dp)_T", gas), 1, 1e-15);
  EXPECT_NEAR(valueOf("(drho/dh)_p", gas, Basis::mass) / (0.04 * 0.04) / valueOf("(drho/dh)_p", gas), 1,
              1e-15);
  EXPECT_DOUBLE_EQ(valueOf("w", gas, Basis::mass), valueOf("w", gas));
  EXPECT_DOUBLE_EQ(valueOf("(dT/dp)_s", gas, Basis::mass), valueOf("(dT/dp)_s", gas));
}

TEST(Existence, IsDecidedByRank) {
  const auto absence = [](const std::string& text, Surface surface, Saturated saturated, Phase phase) {
    return Columns({std::get<ColumnExpression>(parseColumn(text))}, Basis::mass, {"R-290"})
        .absence(0, surface, saturated, phase);
  };
  const auto gas = [&](const std::string& text) {
    return absence(text, Surface::single_phase, Saturated::no, Phase::vapour);
  };
  const auto wet = [&](const std::string& text) {
    return absence(text, Surface::pure_two_phase, Saturated::yes, Phase::two_phase);
  };
  EXPECT_EQ(gas("(dh/dv)_rho"), Absence::dependent_variables);
  EXPECT_EQ(gas("(dh/dT)_p"), Absence::none);
  EXPECT_EQ(gas("(dp/dT)_sat"), Absence::needs_saturated_state);
  EXPECT_EQ(gas("beta"), Absence::needs_saturated_state);
  EXPECT_EQ(gas("y[R-290]"), Absence::none);
  EXPECT_EQ(gas("x[R-290]"), Absence::phase_not_there);
  EXPECT_EQ(gas("x[R-32]"), Absence::no_such_component);
  for (const char* text : {"(dh/dT)_p", "(dh/dp)_T", "(dv/dT)_g", "cp", "alpha_v", "kappa_T"})
    EXPECT_EQ(wet(text), Absence::dependent_variables) << text;
  for (const char* text : {"(dp/dT)_h", "(dh/ds)_p", "(dT/dv)_s", "cv", "w", "kappa_s", "mu_JT", "beta",
                           "x[R-290]", "(dh'/dT)_sat"})
    EXPECT_EQ(wet(text), Absence::none) << text;
  EXPECT_EQ(absence("(dp/dT)_sat", Surface::single_phase, Saturated::yes, Phase::liquid), Absence::none);
}

TEST(Singular, AtTheCriticalPointCpHasNoValueAndSaysSo) {
  // van der Waals' critical point: v = 3b, T = 8a/(27 R b); in doubles the slope is rounding or zero: at
  // exactly zero cp is singular.
  JetTile jet = vanDerWaals(300, 1000, 0.9, 9e-5);
  jet.residual[r10].lane.fill(-0.5);
  jet.residual[r20].lane.fill(-0.5);
  GradientTile gradients;
  gradientsOf(jet, gradients);
  const Columns columns({std::get<ColumnExpression>(parseColumn("cp"))}, Basis::mass, {"R-290"});
  ColumnSource source;
  source.count = 1;
  source.overall = &gradients;
  source.phase = Phase::liquid;
  Columns::Out out;
  columns.evaluate(source, out);
  EXPECT_EQ(out.reason[0][0], Absence::singular);
}

}  // namespace
}  // namespace holdfast::thermo
