// The cubic equations against their published pressure forms, their critical conditions, and 50 digits.
#include "thermo/equations/cubic.hpp"

#include <gtest/gtest.h>

#include <cmath>
#include <random>

#include "tests/support/oracle.hpp"
#include "tests/support/theta_rows.hpp"
#include "thermo/equations/model.hpp"

namespace holdfast::thermo {
namespace {

using oracle::Real;
constexpr double kR = 8.31446261815324;
constexpr Composition kPure{1};

const CubicComponent kPropane{369.89, 4251200, 0.1521};
const CubicComponent kIsobutane{407.81, 3629000, 0.184};
const CubicComponent kCarbonDioxide{304.1282, 7377300, 0.2249};
const std::vector<std::vector<double>> kPairs = {{0, -0.007, 0.124}, {-0.007, 0, 0.12}, {0.124, 0.12, 0}};

ResidualTile rowsAt(const Cubic& cubic, const Composition& z, double T, double rho) {
  Row temperature;
  Row density;
  temperature.lane.fill(T);
  density.lane.fill(rho);
  std::array<Row, kMostComponents> fractions;
  for (int i = 0; i < cubic.components(); ++i)
    fractions[static_cast<std::size_t>(i)].lane.fill(z[static_cast<std::size_t>(i)]);
  ResidualTile rows;
  cubic.residual(Order::third, {1, &temperature, &density, fractions.data()}, rows);
  return rows;
}

// Published compressibilities at the critical point (common practice): 0.3074 and 1/3; Omega of Soave's
// equation in closed form.
TEST(Cubic, HasTheCriticalCompressibilityOfItsFamily) {
  EXPECT_NEAR(Cubic::criticalCompressibility(CubicFamily::peng_robinson), 0.3074, 5e-5);
  EXPECT_NEAR(Cubic::criticalCompressibility(CubicFamily::soave), 1.0 / 3.0, 1e-15);
}

TEST(Cubic, MeetsItsExactCriticalConditions) {
  for (const auto family : {CubicFamily::peng_robinson, CubicFamily::soave}) {
    const Cubic cubic(family, {kPropane}, {{0}});
    const double rho =
        kPropane.p_critical / (Cubic::criticalCompressibility(family) * kR * kPropane.T_critical);
    const ResidualTile r = rowsAt(cubic, kPure, kPropane.T_critical, rho);
    EXPECT_NEAR(rho * kR * kPropane.T_critical * (1 + r[r10][0]), kPropane.p_critical,
                1e-13 * kPropane.p_critical);
    EXPECT_NEAR(1 + r[r10][0] + r[r20][0], 0, 1e-13);
    EXPECT_NEAR(r[r20][0] + r[r30][0], 0, 1e-13);
  }
}

// p = RT/(v-b) - a/(v(v+b)+b(v-b)) (Peng, Robinson 1976, Eq. 4) and RT/(v-b) - a/(v(v+b)) (Soave 1972), with
// the rounded constants of the papers: they differ from the exact ones in the fifth digit, and so may p, by
// 1e-4 of its terms.
TEST(Cubic, IsThePressureEquationOfItsPaper) {
  for (const bool peng_robinson : {true, false}) {
    const Cubic cubic(peng_robinson ? CubicFamily::peng_robinson : CubicFamily::soave, {kPropane}, {{0}});
    for (const double T : {220.0, 300.0, 420.0})
      for (const double rho : {10.0, 900.0, 6000.0, 11000.0}) {
        const double w = kPropane.acentric_factor;
        const double m =
            peng_robinson ? 0.37464 + 1.54226 * w - 0.26992 * w * w : 0.480 + 1.574 * w - 0.176 * w * w;
        const double alpha = std::pow(1 + m * (1 - std::sqrt(T / kPropane.T_critical)), 2);
        const double RTc = kR * kPropane.T_critical;
        const double a = (peng_robinson ? 0.45724 : 0.42747) * RTc * RTc / kPropane.p_critical * alpha;
        const double b = (peng_robinson ? 0.07780 : 0.08664) * RTc / kPropane.p_critical;
        const double v = 1 / rho;
        const double repulsion = kR * T / (v - b);
        const double attraction = a / (peng_robinson ? v * (v + b) + b * (v - b) : v * (v + b));
        EXPECT_NEAR(cubic.pressure(kPure, T, rho), repulsion - attraction, 1e-4 * (repulsion + attraction));
        const double from_rows = rho * kR * T * (1 + rowsAt(cubic, kPure, T, rho)[r10][0]);
        EXPECT_NEAR(from_rows, cubic.pressure(kPure, T, rho), 1e-14 * (repulsion + attraction));
      }
  }
}

TEST(Cubic, RowsToThirdOrderAgreeWith50DigitsFromThinGasToDenseLiquid) {
  const std::vector<CubicComponent> components = {kPropane, kIsobutane, kCarbonDioxide};
  const std::vector<double> z = {0.25, 0.7, 0.05};
  const Composition composition{0.25, 0.7, 0.05};
  std::mt19937_64 random(11);
  std::uniform_real_distribution<double> unit(0, 1);
  for (const auto family : {CubicFamily::peng_robinson, CubicFamily::soave}) {
    const Cubic cubic(family, components, kPairs);
    const auto truth = oracle::cubicResidual(family, components, kPairs, z);
    const double limit = cubic.densityLimit(composition);
    for (int k = 0; k < 60; ++k) {
      const double T = 180 + 400 * unit(random);
      const double rho =
          limit * (k % 2 == 0 ? std::pow(10.0, -12 * unit(random)) * 0.9 : 0.98 * unit(random));
      const ResidualTile rows = rowsAt(cubic, composition, T, rho);
      const auto exact =
          oracle::thetaRows(truth(oracle::Series::temperature(Real(T)), oracle::Series::density(Real(rho))),
                            Real(T), Real(rho));
      Real largest = 0;
      for (const Real& row : exact) largest = std::max(largest, Real(abs(row)));
      for (std::size_t i = 0; i < kResidualRows; ++i)
        EXPECT_LE(static_cast<double>(abs(Real(rows[i][0]) - exact[i])), 3e-14 * static_cast<double>(largest))
            << "row " << i;
    }
  }
}

TEST(Cubic, EveryDensityHasThePressureAskedForAndTheyAscend) {
  std::mt19937_64 random(12);
  std::uniform_real_distribution<double> unit(0, 1);
  for (const auto family : {CubicFamily::peng_robinson, CubicFamily::soave}) {
    const Cubic cubic(family, {kPropane}, {{0}});
    for (int k = 0; k < 2000; ++k) {
      const double T = 100 + 500 * unit(random);
      const double p = std::pow(10.0, -10 + 19 * unit(random));
      const auto roots = cubic.densities(kPure, T, p);
      ASSERT_GE(roots.count, 1);
      ASSERT_TRUE(roots.count == 1 || roots.count == 3) << T << " " << p;
      for (int i = 0; i < roots.count; ++i) {
        const double rho = roots.rho[static_cast<std::size_t>(i)];
        if (i > 0) {
          EXPECT_GT(rho, roots.rho[static_cast<std::size_t>(i - 1)]);
        }
        const ResidualTile r = rowsAt(cubic, kPure, T, rho);
        const double slope = rho * kR * T * std::abs(1 + r[r10][0] + r[r20][0]);  // dp/d ln rho
        EXPECT_NEAR(cubic.pressure(kPure, T, rho), p,
                    1e-13 * p + 1e-14 * slope + 1e-14 * rho * kR * T / (1 - rho / cubic.densityLimit(kPure)))
            << T << " " << p;
      }
    }
  }
}

TEST(Cubic, FindsTheTripleRootOfTheCriticalPointAndWhatStandsBesideIt) {
  for (const auto family : {CubicFamily::peng_robinson, CubicFamily::soave}) {
    const Cubic cubic(family, {kPropane}, {{0}});
    const double rho =
        kPropane.p_critical / (Cubic::criticalCompressibility(family) * kR * kPropane.T_critical);
    for (const double off : {0.0, 1e-15, -1e-15, 1e-12, -1e-12, 1e-9, -1e-9}) {
      const auto roots = cubic.densities(kPure, kPropane.T_critical * (1 + off), kPropane.p_critical);
      ASSERT_GE(roots.count, 1);
      // A triple root moves with the cube root of a disturbance.
      for (int i = 0; i < roots.count; ++i)
        EXPECT_NEAR(roots.rho[static_cast<std::size_t>(i)] / rho, 1, 5 * std::cbrt(std::abs(off) + 1e-15));
    }
  }
}

// sum z_i ln phi_i = residual Gibbs energy/(RT) - ln Z = r00 + r10 - ln Z (Euler), and each against 50-digit
// differentiation of n alphar in n_i at constant T and V: an independent formula.
TEST(Cubic, FugacityCoefficientsAreTheDerivativesOfTheResidualEnergy) {
  const std::vector<CubicComponent> components = {kPropane, kIsobutane, kCarbonDioxide};
  const Composition z{0.25, 0.7, 0.05};
  for (const auto family : {CubicFamily::peng_robinson, CubicFamily::soave}) {
    const Cubic cubic(family, components, kPairs);
    for (const double T : {250.0, 350.0, 500.0})
      for (const double rho : {1.0, 800.0, 9000.0}) {
        const double Z = cubic.pressure(z, T, rho) / (rho * kR * T);
        if (!(Z > 0)) continue;
        const auto phi = cubic.logFugacityCoefficients(z, T, rho);
        const ResidualTile r = rowsAt(cubic, z, T, rho);
        double sum = 0;
        for (std::size_t i = 0; i < 3; ++i) sum += z[i] * phi[i];
        EXPECT_NEAR(sum, r[r00][0] + r[r10][0] - std::log(Z), 1e-12);
        for (std::size_t i = 0; i < 3; ++i) {
          // n_i = z_i +- h at V = 1/rho. The oracle takes fractions as doubles, so that h cannot be small:
          // its truncation, 1e-12 or so, is what the tolerance allows for.
          const double h = 1e-6;
          const auto energy = [&](double change) {
            std::vector<double> n = {z[0], z[1], z[2]};
            n[i] += change;
            const double total = n[0] + n[1] + n[2];
            for (double& each : n) each /= total;
            const auto residual = oracle::cubicResidual(family, components, kPairs, n);
            return Real(Real(total) *
                        residual(oracle::Series(Real(T)), oracle::Series(Real(rho) * Real(total))).value());
          };
          const double slope = static_cast<double>(Real((energy(h) - energy(-h)) / (2 * h)));
          EXPECT_NEAR(phi[i], slope - std::log(Z), 1e-8 * (1 + std::abs(slope)));
        }
      }
  }
}

}  // namespace
}  // namespace holdfast::thermo
