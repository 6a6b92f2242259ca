// Candidates: which can be built, what they say when they cannot, where h and s are fixed.
#include "thermo/equilibrium/candidate.hpp"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include "tests/thermo/equilibrium/equilibrium_support.hpp"
#include "thermo/evaluator.hpp"

namespace holdfast::thermo::tests {
namespace {

using testing::HasSubstr;

std::string refusal(const std::vector<std::string>& components, EquationFamily family) {
  CandidateSpec spec;
  spec.components = components;
  spec.equation = family;
  const auto made = makeCandidate(library(), spec);
  return made.ok() ? "built" : made.error().message;
}

TEST(Candidates, EveryFluidOfTheLibraryCanBeBuiltWithEveryEquationItHas) {
  int references = 0;
  int cubics = 0;
  for (const Fluid& fluid : library().fluids()) {
    if (fluid.reference) {
      EXPECT_EQ(refusal({fluid.label()}, EquationFamily::reference), "built") << fluid.label();
      ++references;
    }
    if (fluid.acentric_factor) {
      EXPECT_EQ(refusal({fluid.label()}, EquationFamily::peng_robinson), "built") << fluid.label();
      EXPECT_EQ(refusal({fluid.label()}, EquationFamily::soave), "built") << fluid.label();
      ++cubics;
    }
  }
  EXPECT_EQ(references, 70);
  EXPECT_EQ(cubics, 82);
}

TEST(Candidates, NothingIsReplacedInSilence) {
  EXPECT_THAT(refusal({"R-32", "R-125"}, EquationFamily::reference),
              HasSubstr("not available yet; \"peng-robinson\""));
  EXPECT_THAT(refusal({"ethanol"}, EquationFamily::reference),
              HasSubstr("\"ethanol\" has no reference equation; \"peng-robinson\""));
  EXPECT_THAT(refusal({"R-115"}, EquationFamily::soave), HasSubstr("\"reference\" is available"));
  EXPECT_THAT(refusal({"R-29O"}, EquationFamily::reference), HasSubstr("did you mean \"R-290\"?"));
  EXPECT_THAT(refusal({"R-32", "difluoromethane"}, EquationFamily::soave),
              HasSubstr("\"R-32\" stands twice"));
  EXPECT_THAT(refusal({}, EquationFamily::soave), HasSubstr("1 to 8 components"));
}

TEST(Candidates, SayWhereTheirPairDataComeFrom) {
  EXPECT_EQ(candidateOf({"R-290"}, EquationFamily::reference)->data_kind, "pure");
  EXPECT_EQ(candidateOf({"R-744", "R-290"}, EquationFamily::peng_robinson)->data_kind,
            "published, from memory");
  EXPECT_EQ(candidateOf({"R-744", "R-290"}, EquationFamily::soave)->data_kind, "prediction");
}

/// h in J/kg and s in J/(kg K) of a state.
std::pair<double, double> enthalpyAndEntropy(const std::shared_ptr<const Candidate>& candidate,
                                             InputPair pair, double first, double second) {
  const Evaluator evaluator(
      candidate, {std::get<ColumnExpression>(parseColumn("h")), std::get<ColumnExpression>(parseColumn("s"))},
      Basis::mass, BeyondValidity::compute);
  InputTile input;
  input.count = 1;
  input.pair = pair;
  input.first[0] = first;
  input.second[0] = second;
  ColumnTile out;
  evaluator.evaluate(input, {1}, out);
  return {out.columns.value[0][0], out.columns.value[1][0]};
}

// 200 kJ/kg and 1 kJ/(kg K) of the saturated liquid at 0 degC: the usual reference of refrigeration (common
// practice).
TEST(ReferenceState, IsTheUsualOneForEveryEquationWithALiquidAtZeroDegrees) {
  for (const auto family : {EquationFamily::reference, EquationFamily::peng_robinson, EquationFamily::soave})
    for (const char* name : {"R-290", "R-134a", "R-717", "R-744"}) {
      const auto candidate = candidateOf({name}, family);
      EXPECT_EQ(candidate->reference_used[0].state, "saturated liquid");
      const auto [h, s] = enthalpyAndEntropy(candidate, InputPair::T_beta, 273.15, 0);
      EXPECT_NEAR(h, 200e3, 1e-6) << name;
      EXPECT_NEAR(s, 1e3, 1e-8) << name;
    }
}

TEST(ReferenceState, GoesToTheTriplePointOrTheBoilingPointWhereThereIsNoSuchLiquid) {
  const auto water = candidateOf({"water"}, EquationFamily::reference);
  EXPECT_EQ(water->reference_used[0].state, "triple-point liquid");
  EXPECT_EQ(water->reference_used[0].T, 273.16);
  const auto nitrogen = candidateOf({"nitrogen"}, EquationFamily::reference);
  EXPECT_EQ(nitrogen->reference_used[0].state, "normal-boiling liquid");
  EXPECT_NEAR(nitrogen->reference_used[0].T, 77.355, 0.01);  // Span et al. (2000)
  EXPECT_NEAR(enthalpyAndEntropy(nitrogen, InputPair::p_beta, 101325, 0).first, 200e3, 1e-6);
  int elsewhere = 0;
  for (const Fluid& fluid : library().fluids())
    if (fluid.reference && candidateOf({fluid.label()}, EquationFamily::reference)->reference_used[0].state !=
                               "saturated liquid")
      ++elsewhere;
  EXPECT_EQ(elsewhere, 13);  // of the 70
}

TEST(ReferenceState, CanBeChosen) {
  CandidateSpec spec;
  spec.components = {"R-290"};
  spec.reference_state = {300, 5e5, 2e3};
  const auto made = makeCandidate(library(), spec);
  ASSERT_TRUE(made.ok());
  const auto [h, s] = enthalpyAndEntropy(*made, InputPair::T_beta, 300, 0);
  EXPECT_NEAR(h, 5e5, 1e-6);
  EXPECT_NEAR(s, 2e3, 1e-8);
}

}  // namespace
}  // namespace holdfast::thermo::tests
