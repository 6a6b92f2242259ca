// The numbering of points, held against plain nested loops over candidates, compositions and axes.
#include "proto/points.hpp"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>
#include <limits>
#include <numeric>

namespace holdfast::plan {
namespace {

using ::testing::ElementsAre;

void addAxis(v1::Plan& plan, const char* quantity, std::vector<double> values) {
  auto& axis = *plan.add_axes();
  axis.set_quantity(quantity);
  for (const double value : values) axis.add_values(value);
}

v1::PlannedCandidate& addPure(v1::Plan& plan) {
  auto& candidate = *plan.add_candidates();
  candidate.add_components("R-290");
  candidate.add_molar_mass(0.044);
  candidate.mutable_fixed()->add_mole_fraction(1);
  return candidate;
}

v1::PlannedCandidate& addLattice(v1::Plan& plan, std::vector<double> molar_masses, std::uint32_t steps) {
  auto& candidate = *plan.add_candidates();
  for (const double M : molar_masses) {
    candidate.add_components("component");
    candidate.add_molar_mass(M);
  }
  candidate.mutable_lattice()->set_steps(steps);
  return candidate;
}

TEST(Points, OfAPureFluidAreTheProductOfItsAxes) {
  v1::Plan plan;
  addPure(plan);
  addAxis(plan, "T", {1, 2, 3});
  addAxis(plan, "p", {10, 20});
  const Points points(plan);
  EXPECT_EQ(points.count(), 6u);
  EXPECT_EQ(points.compositions(), 1u);
  EXPECT_EQ(points.perComposition(), 6u);
  EXPECT_THAT(points.moleFractions(0, 0), ElementsAre(1.0));
}

TEST(Points, RunTheLastAxisFastest) {
  v1::Plan plan;
  addPure(plan);
  addPure(plan);
  addAxis(plan, "T", {1, 2, 3});
  addAxis(plan, "p", {10, 20});
  const Points points(plan);
  std::vector<double> T(5), p(5);
  points.axisValues(0, 3, 5, T.data());
  points.axisValues(1, 3, 5, p.data());
  EXPECT_THAT(T, ElementsAre(2, 3, 3, 1, 1));
  EXPECT_THAT(p, ElementsAre(20, 10, 20, 10, 20));
}

TEST(Points, AreCutWhereTheCompositionChanges) {
  v1::Plan plan;
  addPure(plan);
  addLattice(plan, {0.04, 0.06}, 2);  // 3 compositions
  addPure(plan);
  addAxis(plan, "T", {1, 2, 3, 4});
  addAxis(plan, "p", {10});
  const Points points(plan);
  ASSERT_EQ(points.count(), 20u);
  EXPECT_EQ(points.compositionsOf(1), 3u);

  const auto runs = points.runs(3, 14);
  ASSERT_EQ(runs.size(), 5u);
  const std::vector<std::uint64_t> first = {3, 4, 8, 12, 16}, length = {1, 4, 4, 4, 1},
                                   candidate = {0, 1, 1, 1, 2}, inside = {0, 0, 1, 2, 0};
  for (std::size_t i = 0; i < runs.size(); ++i) {
    EXPECT_EQ(runs[i].first_point, first[i]);
    EXPECT_EQ(runs[i].points, length[i]);
    EXPECT_EQ(runs[i].candidate, candidate[i]);
    EXPECT_EQ(runs[i].composition_of_candidate, inside[i]);
    EXPECT_EQ(runs[i].composition, i);
  }
}

TEST(Points, RangesMeetWithoutGapOrOverlapHoweverTheyAreCut) {
  v1::Plan plan;
  addLattice(plan, {0.04, 0.05, 0.06}, 3);  // 10 compositions
  addPure(plan);
  addAxis(plan, "T", {1, 2, 3, 4, 5, 6, 7});
  addAxis(plan, "p", {10, 20, 30});
  const Points points(plan);
  ASSERT_EQ(points.count(), 11u * 21u);
  for (std::uint64_t step = 1; step < 70; step += 3) {
    std::uint64_t expected = 0;
    for (std::uint64_t first = 0; first < points.count(); first += step)
      for (const plan::Run& run : points.runs(first, step)) {
        EXPECT_EQ(run.first_point, expected);
        EXPECT_EQ(run.composition, expected / 21);
        expected += run.points;
      }
    EXPECT_EQ(expected, points.count());
  }
}

TEST(Points, BeyondTheLastOneAreLeftOut) {
  v1::Plan plan;
  addPure(plan);
  addAxis(plan, "T", {1, 2});
  const Points points(plan);
  EXPECT_TRUE(points.runs(2, 64).empty());
  EXPECT_EQ(points.runs(1, std::numeric_limits<std::uint64_t>::max()).at(0).points, 1u);
}

TEST(Points, OfAPlanWithAnEmptyAxisAreNone) {
  v1::Plan plan;
  addPure(plan);
  addAxis(plan, "T", {});
  const Points points(plan);
  EXPECT_EQ(points.count(), 0u);
  EXPECT_TRUE(points.runs(0, 64).empty());
}

// Stars and bars (Feller, An Introduction to Probability Theory and Its Applications, 1950, II.5).
TEST(Lattice, HasAsManyCompositionsAsStarsAndBars) {
  v1::Plan plan;
  addLattice(plan, {1, 1}, 20);
  addLattice(plan, {1, 1, 1}, 10);
  addLattice(plan, {1, 1, 1, 1}, 1);
  addLattice(plan, std::vector<double>(8, 1.0), 1000);
  const Points points(plan);
  EXPECT_EQ(points.compositionsOf(0), 21u);
  EXPECT_EQ(points.compositionsOf(1), 66u);
  EXPECT_EQ(points.compositionsOf(2), 4u);
  EXPECT_EQ(points.compositionsOf(3), 204032533091695451u);  // C(1007, 7)
}

TEST(Lattice, CountsThatDoNotFitStayAtTheLargestNumber) {
  v1::Plan plan;
  addLattice(plan, std::vector<double>(8, 1.0), 1000);
  addAxis(plan, "T", std::vector<double>(1000, 300.0));
  EXPECT_EQ(Points(plan).count(), std::numeric_limits<std::uint64_t>::max());
}

TEST(Lattice, RunsThroughEveryCompositionInLexicographicOrder) {
  constexpr int steps = 7;
  v1::Plan plan;
  addLattice(plan, {1, 1, 1, 1}, steps);
  const Points points(plan);
  std::uint64_t index = 0;
  for (int a = 0; a <= steps; ++a)
    for (int b = 0; a + b <= steps; ++b)
      for (int c = 0; a + b + c <= steps; ++c) {
        const auto z = points.moleFractions(0, index++);
        EXPECT_THAT(z, ElementsAre(a / 7.0, b / 7.0, c / 7.0, (steps - a - b - c) / 7.0));
      }
  EXPECT_EQ(index, points.compositionsOf(0));
}

TEST(Lattice, OfEightComponentsInThousandStepsIsFoundAtBothEnds) {
  v1::Plan plan;
  addLattice(plan, std::vector<double>(8, 1.0), 1000);
  const Points points(plan);
  EXPECT_EQ(points.moleFractions(0, 0), (std::vector<double>{0, 0, 0, 0, 0, 0, 0, 1}));
  EXPECT_EQ(points.moleFractions(0, 1), (std::vector<double>{0, 0, 0, 0, 0, 0, 0.001, 0.999}));
  EXPECT_EQ(points.moleFractions(0, points.compositionsOf(0) - 1),
            (std::vector<double>{1, 0, 0, 0, 0, 0, 0, 0}));
}

TEST(Lattice, ByMassIsConvertedWithTheMolarMasses) {
  v1::Plan plan;
  addLattice(plan, {0.02, 0.08}, 4).mutable_lattice()->set_by_mass(true);
  const Points points(plan);
  // w = (1/4, 3/4): n = (12.5, 9.375) mol/kg
  const auto z = points.moleFractions(0, 1);
  EXPECT_NEAR(z[0], 12.5 / 21.875, 1e-15);
  EXPECT_NEAR(z[1], 9.375 / 21.875, 1e-15);
  EXPECT_THAT(points.moleFractions(0, 0), ElementsAre(0, 1));
  EXPECT_THAT(points.moleFractions(0, 4), ElementsAre(1, 0));
}

}  // namespace
}  // namespace holdfast::plan
