// The kernel against printed tables, against differentiation at 50 digits, and against itself in other lanes
// and instruction sets.
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <numeric>
#include <random>

#include "tests/support/oracle.hpp"
#include "tests/support/theta_rows.hpp"
#include "thermo/equations/kernel.hpp"
#include "thermo/equations/reference.hpp"
#include "thermo/fluids/library.hpp"

namespace holdfast::thermo {
namespace {

using oracle::Real;

const FluidLibrary& library() {
  static const Result<FluidLibrary> loaded = FluidLibrary::load(HOLDFAST_SOURCE_DIR "/thermo/fluids/data");
  if (!loaded) throw std::runtime_error(loaded.error().message);
  return *loaded;
}

const ReferenceFluid& reference(const std::string& file) {
  for (const auto& fluid : library().references())
    if (fluid.file == file) return fluid;
  throw std::runtime_error(file);
}

struct Jet {
  std::array<double, kResidualRows> r;
  std::array<double, kIdealRows> i;
};

Jet jetAt(const ReferenceFluid& fluid, double T, double rho) {
  const ReferenceEquation equation(fluid.equation);
  const IdealPart ideal(fluid.ideal);
  Row temperature;
  Row density;
  temperature.lane.fill(T);
  density.lane.fill(rho);
  ResidualTile residual;
  IdealTile part;
  equation.residual(Order::third, {1, &temperature, &density, nullptr}, residual);
  ideal.evaluate(Order::third, 1, temperature, part);
  Jet jet;
  for (std::size_t k = 0; k < kResidualRows; ++k) jet.r[k] = residual[k][0];
  for (std::size_t k = 0; k < kIdealRows; ++k) jet.i[k] = part[k][0];
  return jet;
}

// Every kind of term, to third order. The yardstick is the row itself or, where terms cancel, 1e-13 of the
// largest row: rounding of the powers tau^t (t up to 50) alone is some 1e-14.
TEST(References, RowsOfAllSeventyEquationsAgreeWith50Digits) {
  std::mt19937_64 random(4);
  std::uniform_real_distribution<double> unit(0, 1);
  for (const ReferenceFluid& fluid : library().references()) {
    const auto truth = oracle::referenceResidual(fluid.equation);
    for (int k = 0; k < 6; ++k) {
      const double T =
          fluid.T_from + unit(random) * (std::min(fluid.T_up_to, 2 * fluid.T_critical) - fluid.T_from);
      const double rho = fluid.rho_critical * (k < 2 ? std::pow(10.0, -12 + 6 * k) : 2.9 * unit(random));
      const Jet jet = jetAt(fluid, T, rho);
      const auto rows =
          oracle::thetaRows(truth(oracle::Series::temperature(Real(T)), oracle::Series::density(Real(rho))),
                            Real(T), Real(rho));
      Real largest = 0;
      for (const Real& row : rows) largest = std::max(largest, Real(abs(row)));
      // Three terms of R-123 have no density in front; they cancel with their damped twins in thin gas, to
      // the rounding of the terms.
      const double floor = fluid.file == "r-123" ? 1e-13 : 0;
      for (std::size_t i = 0; i < kResidualRows; ++i)
        EXPECT_LE(static_cast<double>(abs(Real(jet.r[i]) - rows[i])),
                  2e-13 * static_cast<double>(largest) + floor)
            << fluid.file << " row " << i << " T=" << T << " rho=" << rho;
    }
  }
}

TEST(References, RowsAreFiniteAtTheCriticalPointAndWithoutDensity) {
  for (const ReferenceFluid& fluid : library().references()) {
    for (const double delta : {0.0, 1.0, 5.0}) {
      const Jet jet = jetAt(fluid, fluid.equation.scale_T, delta * fluid.equation.scale_rho);
      for (const double row : jet.r) EXPECT_TRUE(std::isfinite(row)) << fluid.file << " at delta " << delta;
    }
    const Jet empty = jetAt(fluid, fluid.equation.scale_T, 0);
    EXPECT_NEAR(empty.r[r10], 0, 1e-15) << fluid.file;
  }
}

TEST(References, ALaneDoesNotDependOnItsNeighboursNorOnItsPlace) {
  std::mt19937_64 random(9);
  std::uniform_real_distribution<double> unit(0, 1);
  for (const char* file : {"water", "propane", "r-123", "r-152a", "carbon-dioxide"}) {
    const ReferenceFluid& fluid = reference(file);
    const ReferenceEquation equation(fluid.equation);
    Row T;
    Row rho;
    for (int k = 0; k < kTile; ++k) {
      T[k] = fluid.T_critical * (0.6 + unit(random));
      rho[k] = fluid.rho_critical * 2.5 * unit(random);
    }
    ResidualTile straight;
    equation.residual(Order::second, {kTile, &T, &rho, nullptr}, straight);
    std::array<int, kTile> order;
    std::iota(order.begin(), order.end(), 0);
    std::shuffle(order.begin(), order.end(), random);
    Row T2;
    Row rho2;
    for (int k = 0; k < kTile; ++k) {
      T2[k] = T[order[static_cast<std::size_t>(k)]];
      rho2[k] = rho[order[static_cast<std::size_t>(k)]];
    }
    ResidualTile shuffled;
    equation.residual(Order::second, {kTile, &T2, &rho2, nullptr}, shuffled);
    for (int k = 0; k < kTile; ++k)
      for (std::size_t i = 0; i < 6; ++i)
        EXPECT_EQ(shuffled[i][k], straight[i][order[static_cast<std::size_t>(k)]]);
  }
}

TEST(Kernels, GiveTheSameBitsWhereTheProcessorFusesAndTheSameDigitsElsewhere) {
  const EquationPlan plan(reference("water").equation);
  Row T;
  Row rho;
  for (int k = 0; k < kTile; ++k) {
    T[k] = 300 + 7.3 * k;
    rho[k] = 100 + 850.0 * k;
  }
  ResidualTile plain;
  kernelsOf("baseline")->residual(plan, Order::third, kTile, T, rho, plain);
  std::optional<ResidualTile> fused;
  for (const char* name : {"avx2", "avx512"}) {
    const Kernels* variant = kernelsOf(name);
    if (variant == nullptr) {
      std::cout << "SKIPPED on this processor: " << name << "\n";
      continue;
    }
    ResidualTile rows;
    variant->residual(plan, Order::third, kTile, T, rho, rows);
    for (std::size_t i = 0; i < kResidualRows; ++i)
      for (int k = 0; k < kTile; ++k) {
        double largest = 0;
        for (const Row& row : plain) largest = std::max(largest, std::abs(row[k]));
        EXPECT_NEAR(rows[i][k], plain[i][k], 1e-13 * largest) << name;
        if (fused) {
          EXPECT_EQ(rows[i][k], (*fused)[i][k]);
        }
      }
    fused = rows;
  }
}

// The ideal part against its own definition at 50 digits: cp0 from the derivative of u0, s0 from the integral
// of cv0/T.
TEST(IdealPart, RowsAreConsistentWithTheHeatCapacity) {
  for (const Fluid& fluid : library().fluids()) {
    const IdealPart part(*fluid.ideal);
    const double T0 = 310.5;
    Row T;
    T.lane.fill(T0);
    IdealTile rows;
    part.evaluate(Order::third, 1, T, rows);
    double cp0 = fluid.ideal->c0;
    for (const auto& term : fluid.ideal->power) cp0 += term.c * std::pow(T0, term.e);
    for (const auto& term : fluid.ideal->einstein) {
      const double x = term.u / T0;
      cp0 += term.v * x * x * std::exp(x) / std::pow(std::expm1(x), 2);
    }
    EXPECT_NEAR(rows[i_cv][0], cp0 - 1, 1e-12 * cp0) << fluid.label();
    // A fluid of ideal part alone, at 50 digits, with the constants of the rows at T0: f and its derivatives
    // elsewhere must agree.
    oracle::Fluid truth([](const oracle::Series&, const oracle::Series&) { return oracle::Series(); },
                        {{*fluid.ideal, 1.0}}, 1.0);
    truth.calibrate(T0, rows[i_f][0], rows[i_u][0]);
    for (const double T1 : {150.0, 290.0, 480.0, 900.0}) {
      T.lane.fill(T1);
      part.evaluate(Order::third, 1, T, rows);
      const oracle::Series A = truth.helmholtz(Real(T1), Real(1.0));
      const double f = static_cast<double>(Real(A.value() / T1));
      const double cv = static_cast<double>(Real(-T1 * 2 * A.at(2, 0)));
      const double dcv = static_cast<double>(Real(-T1 * (2 * A.at(2, 0) + T1 * 6 * A.at(3, 0))));
      const double scale = std::abs(rows[i_u][0]) + std::abs(f) + 1;
      EXPECT_NEAR(rows[i_f][0], f, 1e-12 * scale) << fluid.label() << " " << T1;
      EXPECT_NEAR(rows[i_cv][0], cv, 1e-12 * (std::abs(cv) + 10)) << fluid.label() << " " << T1;
      EXPECT_NEAR(rows[i_dcv][0], dcv, 1e-11 * (std::abs(cv) + 10)) << fluid.label() << " " << T1;
    }
  }
}

}  // namespace
}  // namespace holdfast::thermo
