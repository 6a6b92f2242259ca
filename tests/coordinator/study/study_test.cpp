// Good studies and the plans that come of them.
#include "coordinator/study/study.hpp"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <numeric>

#include "proto/points.hpp"
#include "tests/coordinator/study/study_support.hpp"

namespace holdfast::coordinator {
namespace {

using ::testing::ElementsAre;
using ::testing::SizeIs;

constexpr const char* kExample = R"~(
title = "Propane and a blend around the critical region"
equation = "reference"
basis = "mass"

[[candidate]]
fluid = "R-290"

[[candidate]]
components = ["R-32", "R-1234yf"]
fractions = [0.689, 0.311]
fractions_by = "mass"
equation = "peng-robinson"

[[candidate]]
components = ["R-290", "R-600a"]
lattice = 20
equation = "peng-robinson"

[[axis]]
quantity = "T"
from = "-20 degC"
to = "120 degC"
count = 141

[[axis]]
quantity = "p"
values = ["1 bar", "5 bar", "20 bar"]

[collect]
quantities = ["rho", "h", "s", "cp", "w"]
partials = ["(dh/dp)_T", "(ds/dp)_T", "(dT/dp)_h", "(drho/dT)_p"]

[reference_state]
state = "saturated liquid"
T = "0 degC"
h = "200 kJ/kg"
s = "1 kJ/(kg K)"
)~";

const std::string kAxes =
    "[[axis]]\nquantity = \"T\"\nvalues = [300, 310]\n[[axis]]\nquantity = \"p\"\nvalues = [1e5]\n";
const std::string kCollect = "[collect]\nquantities = [\"rho\"]\n";

TEST(Study, BecomesAPlan) {
  const v1::Plan plan = planOf(kExample, "example");
  EXPECT_EQ(plan.name(), "example");
  EXPECT_EQ(plan.title(), "Propane and a blend around the critical region");
  EXPECT_EQ(plan.basis(), v1::BASIS_MASS);
  EXPECT_FALSE(plan.refuse_beyond_validity());
  EXPECT_EQ(plan.reference_state().t(), 273.15);
  EXPECT_EQ(plan.reference_state().h(), 200e3);
  EXPECT_EQ(plan.reference_state().s(), 1e3);

  ASSERT_THAT(plan.candidates(), SizeIs(3));
  EXPECT_EQ(plan.candidates(0).label(), "R-290");
  EXPECT_EQ(plan.candidates(0).equation(), "reference");
  EXPECT_THAT(plan.candidates(0).components(), ElementsAre("R-290"));
  EXPECT_THAT(plan.candidates(0).fixed().mole_fraction(), ElementsAre(1.0));

  EXPECT_EQ(plan.candidates(1).label(), "R-32/R-1234yf (68.9/31.1)");
  EXPECT_EQ(plan.candidates(1).equation(), "peng-robinson");
  const double moles_32 = 0.689 / 0.052024, moles_1234yf = 0.311 / 0.1140416;  // M of catalogue.csv
  EXPECT_NEAR(plan.candidates(1).fixed().mole_fraction(0), moles_32 / (moles_32 + moles_1234yf), 1e-6);

  EXPECT_EQ(plan.candidates(2).label(), "R-290/R-600a");
  EXPECT_EQ(plan.candidates(2).lattice().steps(), 20u);
  EXPECT_FALSE(plan.candidates(2).lattice().by_mass());
  EXPECT_NEAR(plan.candidates(2).molar_mass(1), 0.0581222, 1e-6);

  ASSERT_THAT(plan.axes(), SizeIs(2));
  ASSERT_THAT(plan.axes(0).values(), SizeIs(141));
  EXPECT_NEAR(plan.axes(0).values(0), 253.15, 1e-12);
  EXPECT_NEAR(plan.axes(0).values(20), 273.15, 1e-12);
  EXPECT_NEAR(plan.axes(0).values(140), 393.15, 1e-12);
  EXPECT_THAT(plan.axes(1).values(), ElementsAre(1e5, 5e5, 20e5));

  EXPECT_THAT(plan.columns(),
              ElementsAre("rho", "h", "s", "cp", "w", "(dh/dp)_T", "(ds/dp)_T", "(dT/dp)_h", "(drho/dT)_p"));
  EXPECT_EQ(plan.points(), (1u + 1u + 21u) * 141u * 3u);
  EXPECT_EQ(plan.points_per_job() % 64, 0u);
}

TEST(Study, HasDefaultsForWhatItDoesNotSay) {
  const v1::Plan plan = planOf("[[candidate]]\nfluid = \"R-290\"\n" + kAxes + kCollect);
  EXPECT_EQ(plan.candidates(0).equation(), "reference");
  EXPECT_EQ(plan.basis(), v1::BASIS_MASS);
  EXPECT_FALSE(plan.refuse_beyond_validity());
  EXPECT_EQ(plan.reference_state().t(), 273.15);
  EXPECT_EQ(plan.reference_state().h(), 200e3);
  EXPECT_EQ(plan.reference_state().s(), 1e3);
}

TEST(Study, TakesItsOtherWords) {
  const v1::Plan plan = planOf(
      "basis = \"molar\"\nbeyond_validity = \"refuse\"\n[[candidate]]\nfluid = \"propane\"\nequation = "
      "\"soave\"\n"
      "[[axis]]\nquantity = \"rho\"\nvalues = [\"2 mol/l\"]\n[[axis]]\nquantity = \"T\"\nvalues = [300]\n"
      "[collect]\nquantities = [\"h\"]\n");
  EXPECT_EQ(plan.basis(), v1::BASIS_MOLAR);
  EXPECT_TRUE(plan.refuse_beyond_validity());
  EXPECT_EQ(plan.candidates(0).equation(), "soave");
  EXPECT_THAT(plan.candidates(0).components(), ElementsAre("R-290"));
  EXPECT_NEAR(plan.axes(0).values(0), 2000, 1e-9);
}

TEST(Study, TakesEveryPairOfAxesInEitherOrder) {
  const std::string T = "[[axis]]\nquantity = \"T\"\nvalues = [300]\n",
                    p = "[[axis]]\nquantity = \"p\"\nvalues = [1e5]\n",
                    rho = "[[axis]]\nquantity = \"rho\"\nvalues = [10]\n",
                    beta = "[[axis]]\nquantity = \"beta\"\nvalues = [\"20 %\"]\n";
  for (const auto& [first, second] :
       {std::pair(T, p), std::pair(T, rho), std::pair(T, beta), std::pair(p, beta)}) {
    EXPECT_EQ(
        planOf("[[candidate]]\nfluid = \"R-290\"\n" + first + second + "[collect]\nquantities = [\"h\"]\n")
            .points(),
        1u);
    EXPECT_EQ(
        planOf("[[candidate]]\nfluid = \"R-290\"\n" + second + first + "[collect]\nquantities = [\"h\"]\n")
            .points(),
        1u);
  }
}

TEST(Study, SpacesAnAxisByEqualRatiosWhereItSaysLog) {
  const v1::Plan plan = planOf(
      "[[candidate]]\nfluid = \"R-290\"\n[[axis]]\nquantity = \"T\"\nvalues = [300]\n[[axis]]\nquantity = "
      "\"p\"\n"
      "from = \"1 bar\"\nto = \"100 bar\"\ncount = 9\nspacing = \"log\"\n" +
      kCollect);
  const auto& values = plan.axes(1).values();
  ASSERT_THAT(values, SizeIs(9));
  EXPECT_EQ(values[0], 1e5);
  EXPECT_EQ(values[8], 1e7);
  for (int i = 1; i < 9; ++i) EXPECT_NEAR(values[i] / values[i - 1], std::pow(100.0, 1.0 / 8), 1e-14);
}

TEST(Study, TakesADesignatedBlendByItsMassFractions) {
  const v1::Plan plan =
      planOf("equation = \"peng-robinson\"\n[[candidate]]\nfluid = \"R-410A\"\n" + kAxes + kCollect);
  EXPECT_EQ(plan.candidates(0).label(), "R-410A");
  EXPECT_THAT(plan.candidates(0).components(), ElementsAre("R-32", "R-125"));
  // 50/50 by mass (ISO 817)
  EXPECT_NEAR(plan.candidates(0).fixed().mole_fraction(0), 0.697615, 1e-5);
}

TEST(Study, TakesEveryBlendOfTheData) {
  ASSERT_GT(library().blends().size(), 90u);
  std::string text = "equation = \"peng-robinson\"\n";
  for (const thermo::Blend& blend : library().blends())
    text += "[[candidate]]\nfluid = \"" + blend.designation + "\"\n";
  const v1::Plan plan = planOf(text + kAxes + kCollect);
  ASSERT_EQ(static_cast<std::size_t>(plan.candidates_size()), library().blends().size());
  for (const auto& candidate : plan.candidates())
    EXPECT_NEAR(std::accumulate(candidate.fixed().mole_fraction().begin(),
                                candidate.fixed().mole_fraction().end(), 0.0),
                1, 1e-15)
        << candidate.label();
}

TEST(Study, GivesEveryCandidateALabelOfItsOwn) {
  const v1::Plan plan = planOf(
      "equation = \"peng-robinson\"\n"
      "[[candidate]]\nfluid = \"R-290\"\n"
      "[[candidate]]\nfluid = \"R-290\"\nequation = \"reference\"\n"
      "[[candidate]]\ncomponents = [\"R-290\", \"R-600a\"]\nlattice = 2\n"
      "[[candidate]]\ncomponents = [\"R-290\", \"R-600a\"]\nlattice = 5\nfractions_by = \"mass\"\n"
      "[[candidate]]\ncomponents = [\"R-32\", \"R-125\"]\nfractions = [0.50001, 0.49999]\nfractions_by = "
      "\"mass\"\n"
      "[[candidate]]\ncomponents = [\"R-32\", \"R-125\"]\nfractions = [0.50002, 0.49998]\nfractions_by = "
      "\"mass\"\n"
      "[[candidate]]\nfluid = \"hydrogen sulfide\"\n" +
      kAxes + kCollect);
  std::vector<std::string> labels;
  for (const auto& candidate : plan.candidates()) labels.push_back(candidate.label());
  EXPECT_THAT(labels, ElementsAre("R-290, peng-robinson", "R-290, reference",
                                  "R-290/R-600a in steps of 1/2, peng-robinson",
                                  "R-290/R-600a in steps of 1/5 by mass, peng-robinson",
                                  "R-32/R-125 (50.001/49.999), peng-robinson",
                                  "R-32/R-125 (50.002/49.998), peng-robinson", "hydrogen sulfide"));
}

TEST(Study, NamesComponentsOfColumnsAsTheCandidatesDo) {
  const v1::Plan plan =
      planOf("[[candidate]]\nfluid = \"R-290\"\n" + kAxes + "[collect]\nquantities = [\"z[propane]\"]\n");
  EXPECT_THAT(plan.columns(), ElementsAre("z[R-290]"));
}

TEST(Study, CutsJobsIntoWholeTilesThatManyWorkersCanShare) {
  const auto jobsOf = [](const std::string& T_count, const std::string& p_count) {
    const v1::Plan plan = planOf(
        "[[candidate]]\nfluid = \"R-290\"\n[[axis]]\nquantity = \"T\"\nfrom = 300\nto = 400\ncount = " +
        T_count + "\n[[axis]]\nquantity = \"p\"\nfrom = 1e5\nto = 2e5\ncount = " + p_count + "\n" + kCollect);
    EXPECT_EQ(plan.points_per_job() % 64, 0u);
    EXPECT_GE(plan.points_per_job(), 64u);
    // 4 MiB of columns, at 8 bytes and a bit a column and 2 bytes a point
    EXPECT_LE(plan.points_per_job() * (plan.columns_size() * 8.125 + 2), 4.0 * 1024 * 1024);
    return (plan.points() + plan.points_per_job() - 1) / plan.points_per_job();
  };
  EXPECT_EQ(jobsOf("2", "2"), 1u);
  EXPECT_EQ(jobsOf("64", "40"), 40u);     // one tile a job
  EXPECT_GE(jobsOf("100", "200"), 100u);  // of 313 tiles
  EXPECT_GE(jobsOf("1000", "1000"), 200u);
  EXPECT_GE(jobsOf("10000", "10000"), 3000u);  // about a second of work each
}

std::string contentsOf(const std::filesystem::path& file) {
  std::ifstream in(file, std::ios::binary);
  return {std::istreambuf_iterator<char>(in), {}};
}

TEST(StudiesOfTheProject, AreReadWithoutAMistake) {
  int studies = 0;
  for (const auto& entry :
       std::filesystem::directory_iterator(std::string(HOLDFAST_SOURCE_DIR) + "/studies")) {
    if (entry.path().extension() != ".toml") continue;
    ++studies;
    const auto reading =
        readStudy(entry.path().stem().string(), contentsOf(entry.path()), library(), StudyLimits{});
    EXPECT_TRUE(reading.plan.has_value()) << render(entry.path().string(), reading.diagnostics);
    EXPECT_TRUE(std::filesystem::exists(std::filesystem::path(entry.path()).replace_extension(".sql")));
  }
  EXPECT_GE(studies, 3);
}

TEST(StudiesOfTheProject, ScreenAtLeastFortyFluids) {
  const v1::Plan plan =
      planOf(contentsOf(std::string(HOLDFAST_SOURCE_DIR) + "/studies/screening.toml"), "screening");
  EXPECT_GE(plan.candidates_size(), 40);
}

}  // namespace
}  // namespace holdfast::coordinator
