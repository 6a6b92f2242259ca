// The hull, the saturation line and thin gas, on closed surfaces against the same surfaces at 50 digits. What
// has to be differentiated along saturation is solved anew beside the state at 50 digits (Boost): differences
// over 1e-12 of T are good to some 24 digits there.
#include <gtest/gtest.h>

#include <cmath>
#include <functional>

#include "tests/support/oracle.hpp"
#include "tests/thermo/jet/closed_surfaces.hpp"

namespace holdfast::thermo {
namespace {

using oracle::Real;
using oracle::Series;

constexpr double kA = 0.9;   // Pa m6/mol2
constexpr double kB = 9e-5;  // m3/mol

/// The fluid of vanDerWaals(): cp0 = 4 R, f(1 K) = 3, u0 = 3 R T.
oracle::Fluid truth(const oracle::Residual& residual) {
  IdealHeatCapacity cp0;
  cp0.c0 = 4;
  oracle::Fluid fluid(residual, {{cp0, 1}}, kR);
  fluid.calibrate(1, 3, 3);
  return fluid;
}

oracle::Fluid vanDerWaalsTruth() {
  return truth([](const Series& T, const Series& rho) {
    return -log(Series(1.0) - Series(kB) * rho) - Series(kA) * rho / (Series(Real(kR)) * T);
  });
}

/// Saturated states at T: both sides' base quantities.
struct Sides {
  oracle::Fluid::Bases liquid, vapour;
  Real rho_liquid, rho_vapour;
};

class HullTest : public testing::TestWithParam<double> {
 protected:
  // Critical point of van der Waals: v = 3 b, T = 8 a/(27 R b).
  const double T_ = GetParam() * 8 * kA / (27 * kR * kB);
  const oracle::Fluid fluid_ = vanDerWaalsTruth();

  Sides sides(const Real& T) const {
    // Starting densities, from the expansion of both branches around the critical point: with t = 1 - T_r,
    // rho_r = 1 + 2 t/5 +- 2 sqrt(t).
    const double tr = GetParam();
    const double middle = 1 + 0.4 * (1 - tr);
    const double half = 2 * std::sqrt(1 - tr);
    const Real scale = 1 / (3 * Real(kB));
    const auto found = oracle::saturation(fluid_, T, (middle + half) * scale, (middle - half) * scale);
    return {fluid_.bases(T, found.rho_liquid), fluid_.bases(T, found.rho_vapour), found.rho_liquid,
            found.rho_vapour};
  }

  /// d/dT of something at saturation, both neighbours solved anew.
  Real alongLine(const std::function<Real(const Sides&)>& of) const {
    const Real step = Real(T_) * Real("1e-12");
    return (of(sides(Real(T_) + step)) - of(sides(Real(T_) - step))) / (2 * step);
  }

  ColumnSource source() {
    const Sides at = sides(Real(T_));
    gradientsOf(vanDerWaals(T_, at.rho_liquid.convert_to<double>(), kA, kB), liquid_);
    gradientsOf(vanDerWaals(T_, at.rho_vapour.convert_to<double>(), kA, kB), vapour_);
    hullOf(liquid_, vapour_, beta_, hull_);
    ColumnSource source;
    source.count = 1;
    source.overall = &hull_;
    source.liquid = &liquid_;
    source.vapour = &vapour_;
    source.beta = &beta_;
    source.phase = Phase::two_phase;
    source.z = &one_;
    return source;
  }
  double column(const std::string& text) {
    const Columns columns({std::get<ColumnExpression>(parseColumn(text))}, Basis::molar, {"R-290"});
    Columns::Out out;
    columns.evaluate(source(), out);
    EXPECT_EQ(out.reason[0][0], Absence::none) << text;
    return out.value[0][0];
  }

  void setBeta(double beta) { beta_.lane.fill(beta); }
  double beta() const { return beta_[0]; }

 private:
  GradientTile liquid_, vapour_, hull_;
  Row beta_{};
  double one_ = 1;
};

/// Rounding of densities and entropies, times the conditioning of differences between the sides, which are
/// 0.3 of their values or more here.
constexpr double kTolerance = 1e-12;

#define EXPECT_SAME(value, wanted) EXPECT_NEAR((value) / (wanted).convert_to<double>(), 1, kTolerance)

TEST_P(HullTest, ValuesFollowTheLeverRule) {
  const Sides at = sides(Real(T_));
  for (const double beta : {0.0, 0.3, 1.0}) {
    setBeta(beta);
    for (const auto& [text, base] :
         {std::pair{"v", Base::v}, {"u", Base::u}, {"h", Base::h}, {"s", Base::s}}) {
      const Real wanted = (1 - Real(beta)) * at.liquid[base].value() + Real(beta) * at.vapour[base].value();
      EXPECT_SAME(column(text), wanted) << text << " at " << beta;
    }
    EXPECT_DOUBLE_EQ(column("beta"), beta);
  }
}

// Clapeyron, Clausius: one side from the algebra, the other from saturation solved anew beside the state.
TEST_P(HullTest, SaturationLineHasTheSlopesOfItsNeighbours) {
  setBeta(0.3);
  const Real slope = alongLine([](const Sides& s) { return s.vapour[Base::p].value(); });
  EXPECT_SAME(column("(dp/dT)_sat"), slope);
  EXPECT_SAME(column("(dT/dp)_sat"), Real(1 / slope));
  EXPECT_SAME(column("(dp/dT)_v"), slope);
  for (const auto& [name, base] :
       {std::pair{"v", Base::v}, {"rho", Base::rho}, {"u", Base::u}, {"h", Base::h}, {"s", Base::s}}) {
    const auto text = [name = std::string(name)](const char* marks, const char* by) {
      return "(d" + name + marks + "/d" + by + ")_sat";
    };
    const Real liquid = alongLine([base = base](const Sides& s) { return s.liquid[base].value(); });
    const Real vapour = alongLine([base = base](const Sides& s) { return s.vapour[base].value(); });
    // dh''/dT and du''/dT pass zero on the way to the critical point: there 1e-12 of their two terms.
    const double scale = kR * (base == Base::u || base == Base::h ? 4.0 : 0.0);
    EXPECT_NEAR(column(text("'", "T")), liquid.convert_to<double>(),
                kTolerance * (std::abs(liquid.convert_to<double>()) + scale))
        << text("'", "T");
    EXPECT_NEAR(column(text("''", "T")), vapour.convert_to<double>(),
                kTolerance * (std::abs(vapour.convert_to<double>()) + scale))
        << text("''", "T");
    EXPECT_SAME(column(text("'", "p")), Real(liquid / slope)) << text("'", "p");
  }
}

// A mixture of given v at T and beside it: beta follows from the lever rule with the sides there.
TEST_P(HullTest, DerivativesAtConstantVolumeAreThoseOfStatesSolvedAnew) {
  for (const double beta : {0.05, 0.3, 0.9}) {
    setBeta(beta);
    const Sides at = sides(Real(T_));
    const Real v = (1 - Real(beta)) / at.rho_liquid + Real(beta) / at.rho_vapour;
    const auto mixed = [&](Base base) {
      return [&v, base](const Sides& s) {
        const Real share = (v - 1 / s.rho_liquid) / (1 / s.rho_vapour - 1 / s.rho_liquid);
        return Real((1 - share) * s.liquid[base].value() + share * s.vapour[base].value());
      };
    };
    const Real cv = alongLine(mixed(Base::u));
    EXPECT_SAME(column("cv"), cv) << beta;
    EXPECT_SAME(column("(du/dT)_v"), cv) << beta;
    EXPECT_SAME(column("(dh/dT)_v"), alongLine(mixed(Base::h))) << beta;
    EXPECT_SAME(column("(ds/dT)_v"), alongLine(mixed(Base::s))) << beta;
    // Along the isotherm everything is a straight line between the sides.
    const Real width = 1 / at.rho_vapour - 1 / at.rho_liquid;
    const auto chord = [&](Base base) {
      return Real((at.vapour[base].value() - at.liquid[base].value()) / width);
    };
    EXPECT_SAME(column("(du/dv)_T"), chord(Base::u)) << beta;
    EXPECT_SAME(column("(dh/dv)_p"), chord(Base::h)) << beta;
    EXPECT_SAME(column("(ds/dv)_T"), chord(Base::s)) << beta;
    // dT at constant s: (dT/dv)_s = -s_v/s_T; w^2 = -v^2 (dp/dv)_s/M with p a function of T alone.
    const Real P = alongLine([](const Sides& s) { return s.vapour[Base::p].value(); });
    const Real T_v = -chord(Base::s) * Real(T_) / cv;
    EXPECT_SAME(column("(dT/dv)_s"), T_v) << beta;
    EXPECT_SAME(column("w"), Real(sqrt(Real(-v * v * P * T_v / Real(0.04))))) << beta;
    EXPECT_SAME(column("kappa_s"), Real(-1 / (v * P * T_v))) << beta;
    // p is a function of T alone, whatever is held fast.
    EXPECT_SAME(column("mu_JT"), Real(1 / P)) << beta;
  }
}

INSTANTIATE_TEST_SUITE_P(ReducedTemperature, HullTest, testing::Values(0.8, 0.9, 0.95));

/// A gas with second and third virial coefficients B = b - c/T^2 and C, both in closed form:
/// alphar = B rho + C rho^2/2.
constexpr double kVirialB = 6e-5;  // m3/mol
constexpr double kVirialC = 2e-9;  // m6/mol2
constexpr double kVirialT = 40;    // m3 K2/mol

JetTile virialGas(double T, double rho) {
  JetTile jet = vanDerWaals(T, rho, 0, 0);  // its ideal part
  const double drop = kVirialT / (T * T);   // theta_t of T^-2 is 2 T^-2
  const double first = (kVirialB - drop) * rho;
  const double second = kVirialC * rho * rho / 2;
  const std::array<double, 6> rows = {first + second,     first + 2 * second, -2 * drop * rho,
                                      first + 4 * second, -2 * drop * rho,    -4 * drop * rho};
  for (std::size_t k = 0; k < rows.size(); ++k) jet.residual[k].lane.fill(rows[k]);
  return jet;
}

TEST(ThinGas, KeepsItsDigitsWhereAnIdealGasHasNothing) {
  const oracle::Fluid fluid = truth([](const Series& T, const Series& rho) {
    return (Series(kVirialB) - Series(kVirialT) / (T * T)) * rho + Series(kVirialC / 2) * rho * rho;
  });
  const double T = 250;
  const double rho_critical = 5000;  // mol/m3, of the size of propane's
  const std::array<std::pair<const char*, std::array<Base, 3>>, 6> partials{{
      {"(dh/dp)_T", {Base::h, Base::p, Base::T}},
      {"(dh/dv)_T", {Base::h, Base::v, Base::T}},
      {"(du/dv)_T", {Base::u, Base::v, Base::T}},
      {"(du/dp)_T", {Base::u, Base::p, Base::T}},
      {"(dT/dp)_h", {Base::T, Base::p, Base::h}},
      {"(dT/dv)_u", {Base::T, Base::v, Base::u}},
  }};
  for (int power = -1; power >= -12; --power) {
    const double rho = rho_critical * std::pow(10.0, power);
    const JetTile jet = virialGas(T, rho);
    const auto bases = fluid.bases(Real(T), Real(rho));
    for (const auto& [text, names] : partials) {
      const double wanted = oracle::partial(bases, names[0], names[1], names[2]).value.convert_to<double>();
      // A handful of roundings; a sum of ideal and residual parts would have none of its digits left at
      // 1e-12.
      EXPECT_NEAR(valueOf(text, jet) / wanted, 1, 2e-14) << text << " at 1e" << power;
    }
  }
}

}  // namespace
}  // namespace holdfast::thermo
