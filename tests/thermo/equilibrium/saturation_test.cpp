// Saturation lines and critical points of all reference equations, re-checked from their jets, and against
// published boiling points.
#include "thermo/equilibrium/saturation.hpp"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <stdexcept>

#include "thermo/equations/reference.hpp"
#include "thermo/equilibrium/critical.hpp"
#include "thermo/fluids/library.hpp"

namespace holdfast::thermo {
namespace {

const FluidLibrary& library() {
  static const Result<FluidLibrary> loaded = FluidLibrary::load(HOLDFAST_SOURCE_DIR "/thermo/fluids/data");
  if (!loaded) throw std::runtime_error(loaded.error().message);
  return *loaded;
}

std::shared_ptr<const Model> modelOf(const ReferenceFluid& fluid) {
  auto equation = std::make_shared<const ReferenceEquation>(fluid.equation);
  const auto critical =
      findCriticalPoint(*equation, {fluid.T_critical, fluid.p_critical, fluid.rho_critical});
  if (!critical) throw std::runtime_error(critical.error().message);
  ModelComponent component;
  component.designation = fluid.file;
  component.M = fluid.M;
  component.critical = *critical;
  component.T_triple = fluid.T_triple.value_or(fluid.T_from);
  return std::make_shared<const Model>(std::move(equation), std::vector{component},
                                       std::vector{IdealPart(fluid.ideal)});
}

SaturationCurve curveOf(const std::shared_ptr<const Model>& model) {
  auto curve = SaturationCurve::trace(model);
  if (!curve) throw std::runtime_error(curve.error().message);
  return *curve;
}

// By definition: (dp/drho)_T and (d2p/drho2)_T vanish, in units of R T and R T/rho. 1e-8 is far below the
// 1e-2 they reach 1 % away.
TEST(CriticalPoint, HasNoSlopeAndNoBendForEveryEquation) {
  for (const auto& fluid : library().references()) {
    const auto model = modelOf(fluid);
    Row T;
    Row rho;
    T.lane.fill(model->component(0).critical.T);
    rho.lane.fill(model->component(0).critical.rho);
    ResidualTile r;
    model->residual(Order::third, 1, T, rho, {1.0}, r);
    EXPECT_NEAR(1 + r[r10][0] + r[r20][0], 0, 1e-8) << fluid.file;
    EXPECT_NEAR(r[r20][0] + r[r30][0], 0, 1e-8) << fluid.file;
  }
}

// Equal pressure and Gibbs energy from the triple point to 0.9999 T_c.
TEST(SaturationLine, MeetsItsConditionsForEveryEquation) {
  for (const auto& fluid : library().references()) {
    const auto model = modelOf(fluid);
    const auto curve = curveOf(model);
    const double T_c = model->component(0).critical.T;
    EXPECT_GE(curve.highestT(), 0.9999 * T_c) << fluid.file;
    Row T;
    for (int k = 0; k < kTile; ++k)
      T[k] = std::min(0.9999 * T_c, curve.lowestT() + (0.9999 * T_c - curve.lowestT()) * k / (kTile - 1));
    SaturationTile at;
    curve.atT(kTile, T, at);
    SaturationTile back;
    curve.atP(kTile, at.p, back);
    ResidualTile l;
    ResidualTile v;
    const double R = model->gasConstant({1.0});
    model->residual(Order::second, kTile, T, at.rho_liquid, {1.0}, l);
    model->residual(Order::second, kTile, T, at.rho_vapour, {1.0}, v);
    for (int k = 0; k < kTile; ++k) {
      const auto lane = static_cast<std::size_t>(k);
      ASSERT_TRUE(at.converged[lane] && back.converged[lane]) << fluid.file << " " << T[k];
      const double p = R * T[k] * at.rho_vapour[k] * (1 + v[r10][k]);
      EXPECT_NEAR(p / at.p[k], 1, 1e-10) << fluid.file << " " << T[k];
      const double liquid = R * T[k] * at.rho_liquid[k] * (1 + l[r10][k]);
      const double stiffness = R * T[k] * at.rho_liquid[k] * std::abs(1 + l[r10][k] + l[r20][k]);
      EXPECT_NEAR(liquid, p, 1e-14 * stiffness + 1e-10 * p) << fluid.file << " " << T[k];
      const double gibbs =
          std::log(at.rho_liquid[k] / at.rho_vapour[k]) + l[r00][k] + l[r10][k] - v[r00][k] - v[r10][k];
      EXPECT_NEAR(gibbs, 0, 1e-11) << fluid.file << " " << T[k];
      EXPECT_NEAR(back.T[k] / T[k], 1, 1e-11) << fluid.file << " " << T[k];
    }
  }
}

// Normal boiling points as in the reference files, within 0.05 K (R-161: 0.1 K). Carbon dioxide sublimes.
TEST(SaturationLine, BoilsAtThePublishedTemperature) {
  for (const auto& fluid : library().references()) {
    if (!fluid.T_boil || fluid.designation == "R-744") continue;
    const auto curve = curveOf(modelOf(fluid));
    if (curve.lowestP() > 101325) continue;  // sublimes
    Row p;
    p.lane.fill(101325);
    SaturationTile at;
    curve.atP(1, p, at);
    ASSERT_TRUE(at.converged[0]) << fluid.file;
    EXPECT_NEAR(at.T[0], *fluid.T_boil, fluid.designation == "R-161" ? 0.1 : 0.05) << fluid.file;
  }
}

// Lemmon, McLinden, Wagner, J. Chem. Eng. Data 54 (2009) 3141: 1.72e-4 Pa at the triple point (three digits).
TEST(SaturationLine, ReachesThePressureOfPropaneAtItsTriplePoint) {
  for (const auto& fluid : library().references())
    if (fluid.file == "propane") {
      EXPECT_NEAR(curveOf(modelOf(fluid)).lowestP(), 1.72e-4, 0.005e-4);
    }
}

TEST(SaturationLine, RefusesLanesOutsideItsRangeAlone) {
  for (const auto& fluid : library().references()) {
    if (fluid.file != "propane") continue;
    const auto curve = curveOf(modelOf(fluid));
    Row T;
    T[0] = 80;
    T[1] = 300;
    T[2] = 370;
    SaturationTile at;
    curve.atT(3, T, at);
    EXPECT_FALSE(at.converged[0]);
    EXPECT_TRUE(at.converged[1]);
    EXPECT_FALSE(at.converged[2]);
  }
}

}  // namespace
}  // namespace holdfast::thermo
