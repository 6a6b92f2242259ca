// Pure two-phase states: the hull's partials against re-solving the equilibrium at 50 digits, and which of
// them do not exist.
#include <gtest/gtest.h>

#include <optional>

#include "tests/thermo/evaluator/truth.hpp"
#include "thermo/evaluator.hpp"

namespace holdfast::thermo::tests {
namespace {

using oracle::Real;

const std::array<const char*, kBases> kSymbols = {"T", "p", "v", "rho", "u", "h", "s", "a", "g"};

/// The nine base quantities of the hull at (T, v) at 50 digits.
std::array<Real, kBases> hullAt(const Subject& subject, const Real& T, const Real& v, double rho_liquid,
                                double rho_vapour) {
  const auto solved = oracle::saturation(subject.truth, T, Real(rho_liquid), Real(rho_vapour));
  const auto liquid = subject.truth.bases(T, solved.rho_liquid);
  const auto vapour = subject.truth.bases(T, solved.rho_vapour);
  const Real vl = 1 / solved.rho_liquid;
  const Real beta = (v - vl) / (1 / solved.rho_vapour - vl);
  std::array<Real, kBases> out;
  for (std::size_t x = 0; x < kBases; ++x)
    out[x] = (1 - beta) * liquid.of[x].value() + beta * vapour.of[x].value();
  out[static_cast<std::size_t>(Base::v)] = v;
  out[static_cast<std::size_t>(Base::rho)] = 1 / v;
  return out;
}

bool dependsOnTAlone(Base x) {
  return x == Base::T || x == Base::p || x == Base::g;
}
bool isVolume(Base x) {
  return x == Base::v || x == Base::rho;
}
bool dependent(Base x, Base z) {
  return x == z || (dependsOnTAlone(x) && dependsOnTAlone(z)) || (isVolume(x) && isVolume(z));
}

TEST(TwoPhase, EveryPartialOfTheHullAgreesWithResolvingTheEquilibrium) {
  std::vector<ColumnExpression> columns;
  for (const char* x : kSymbols)
    for (const char* y : kSymbols)
      for (const char* z : kSymbols)
        if (x != y && y != z && x != z)
          columns.push_back(
              std::get<ColumnExpression>(parseColumn(std::string("(d") + x + "/d" + y + ")_" + z)));

  for (const char* name : {"propane", "water", "R-1234yf", "ammonia", "carbon dioxide", "R-123"}) {
    const Subject subject = subjectOf({name}, {1.0}, EquationFamily::reference);
    const auto& critical = subject.candidate->model->component(0).critical;
    const Evaluator evaluator(subject.candidate, columns, Basis::molar, BeyondValidity::compute);
    InputTile input;
    input.pair = InputPair::T_beta;
    input.count = 6;
    const double lowest = std::max(subject.candidate->saturation[0].lowestT(), 0.5 * critical.T);
    for (int k = 0; k < input.count; ++k) {
      input.first[k] = lowest + (0.98 * critical.T - lowest) * k / (input.count - 1);
      input.second[k] = 0.05 + 0.18 * k;
    }
    ColumnTile out;
    evaluator.evaluate(input, subject.z, out);
    for (int k = 0; k < input.count; ++k) {
      ASSERT_EQ(out.outcome[static_cast<std::size_t>(k)], Outcome::ok) << name;
      ASSERT_EQ(out.phase[static_cast<std::size_t>(k)], Phase::two_phase);
      const auto near = subject.candidate->saturation[0].near(input.first[k]);
      const Real T(input.first[k]);
      const auto solved = oracle::saturation(subject.truth, T, Real(near.rho_liquid), Real(near.rho_vapour));
      const Real beta(input.second[k]);
      const Real v = (1 - beta) / solved.rho_liquid + beta / solved.rho_vapour;
      const auto hull = [&](const Real& t, const Real& volume) {
        return hullAt(subject, t, volume, near.rho_liquid, near.rho_vapour);
      };
      // Central differences at 50 digits with a step of 1e-15: truncation some 1e-30.
      const Real dT = T * Real("1e-15");
      const Real dv = v * Real("1e-15");
      const auto T_up = hull(T + dT, v);
      const auto T_down = hull(T - dT, v);
      const auto v_up = hull(T, v + dv);
      const auto v_down = hull(T, v - dv);
      std::array<Real, kBases> by_T;
      std::array<Real, kBases> by_v;
      for (std::size_t x = 0; x < kBases; ++x) {
        by_T[x] = (T_up[x] - T_down[x]) / (2 * dT);
        by_v[x] = dependsOnTAlone(static_cast<Base>(x)) ? Real(0) : Real((v_up[x] - v_down[x]) / (2 * dv));
      }
      by_T[static_cast<std::size_t>(Base::v)] = by_T[static_cast<std::size_t>(Base::rho)] = 0;
      for (std::size_t c = 0; c < columns.size(); ++c) {
        const auto partial = std::get<Partial>(columns[c].what);
        const auto x = static_cast<std::size_t>(partial.of);
        const auto y = static_cast<std::size_t>(partial.by);
        const auto z = static_cast<std::size_t>(partial.held);
        const Absence reason = out.columns.reason[c][static_cast<std::size_t>(k)];
        if (dependent(partial.by, partial.held)) {
          EXPECT_EQ(reason, Absence::dependent_variables) << columns[c].written_as;
          continue;
        }
        ASSERT_EQ(reason, Absence::none) << columns[c].written_as;
        const Real below = by_T[y] * by_v[z] - by_v[y] * by_T[z];
        const Real value = (by_T[x] * by_v[z] - by_v[x] * by_T[z]) / below;
        const Real absolute = (abs(by_T[x] * by_v[z]) + abs(by_v[x] * by_T[z])) / abs(below);
        const Real miss = abs(Real(out.columns.value[c][k]) - value);
        const Real size = abs(value);
        const Real scale = size * 1000 >= absolute ? size : absolute;
        // 1e-10, and 1e-9 where the denominator itself is a difference of nearly equal terms.
        const Real cancelled = (abs(by_T[y] * by_v[z]) + abs(by_v[y] * by_T[z])) / abs(below);
        EXPECT_LE(miss, Real(1e-10) * scale * (1 + cancelled))
            << name << " " << columns[c].written_as << " at T=" << T;
      }
    }
  }
}

TEST(TwoPhase, HeatCapacityAtConstantPressureAndCompressibilityDoNotExistButSoundDoes) {
  const Subject subject = subjectOf({"propane"}, {1.0}, EquationFamily::reference);
  std::vector<ColumnExpression> columns;
  for (const char* text : {"cp", "alpha_v", "kappa_T", "cv", "w", "kappa_s", "mu_JT", "(dp/dT)_sat", "beta"})
    columns.push_back(std::get<ColumnExpression>(parseColumn(text)));
  const Evaluator evaluator(subject.candidate, columns, Basis::mass, BeyondValidity::compute);
  InputTile input;
  input.pair = InputPair::T_beta;
  input.count = 3;
  for (int k = 0; k < 3; ++k) {
    input.first[k] = 300;
    input.second[k] = 0.5 * k;
  }
  ColumnTile out;
  evaluator.evaluate(input, subject.z, out);
  EXPECT_EQ(out.phase[0], Phase::liquid);
  EXPECT_EQ(out.phase[1], Phase::two_phase);
  EXPECT_EQ(out.phase[2], Phase::vapour);
  for (std::size_t c = 0; c < 3; ++c) {
    EXPECT_EQ(out.columns.reason[c][0], Absence::none)
        << columns[c].written_as;  // the saturated liquid is one phase
    EXPECT_EQ(out.columns.reason[c][1], Absence::dependent_variables) << columns[c].written_as;
    EXPECT_EQ(out.columns.reason[c][2], Absence::none) << columns[c].written_as;
  }
  for (std::size_t c = 3; c < columns.size(); ++c)
    EXPECT_EQ(out.columns.reason[c][1], Absence::none) << columns[c].written_as;
  // The equilibrium speed of sound jumps at the boundary: it is lower on the wet side (common practice:
  // choking of flashing flow).
  EXPECT_LT(out.columns.value[4][1], out.columns.value[4][2]);
  // mu_JT of wet vapour is the slope of the saturation line.
  EXPECT_NEAR(out.columns.value[6][1] * out.columns.value[7][1], 1, 1e-12);
  EXPECT_EQ(out.columns.value[8][1], 0.5);
}

}  // namespace
}  // namespace holdfast::thermo::tests
