// Malformed studies: text, keys and candidates; and what holds of all messages.
#include "tests/coordinator/study/malformed_support.hpp"

namespace holdfast::coordinator {
namespace {

using ::testing::HasSubstr;

class MalformedText : public MalformedStudy {};

TEST_P(MalformedText, IsReportedInItsPlace) {
  expectReportedInPlace(GetParam());
}

INSTANTIATE_TEST_SUITE_P(
    Text, MalformedText,
    ::testing::Values(
        Malformed{"value missing", "title = @\n" + kFluid + kRest, {"expected value"}},
        Malformed{"string not closed", "title = \"abc@\n" + kFluid + kRest, {"string"}},
        Malformed{
            "key twice", "title = \"a\"\ntitle = @\"b\"\n", {"cannot redefine existing string 'title'"}},
        Malformed{"array without a comma", kFluid + "[collect]\nquantities = [\"rho\" @\"h\"]\n", {"array"}},
        Malformed{"bytes that are no UTF-8 (reported at the sign before)",
                  "title = @\"\xff\"\n",
                  {"invalid utf-8"}},
        Malformed{"number too large", "title = 99999999999999999999@\n", {"not representable in 64 bits"}}),
    indexOf);

INSTANTIATE_TEST_SUITE_P(
    Keys, MalformedText,
    ::testing::Values(
        Malformed{"table of another program",
                  kFluid + kRest + "[@uncertainty]\nsamples = 3\n",
                  {R"(unknown key "uncertainty": a study has title, equation)"}},
        Malformed{"key misspelt",
                  "@equaton = \"soave\"\n" + kFluid + kRest,
                  {R"(unknown key "equaton" (did you mean "equation"?))"}},
        Malformed{"key of an axis misspelt",
                  kFluid + kT + "@stap = 3\n" + kP + kCollect,
                  {R"(unknown key "stap")"}},
        Malformed{"key of a candidate misspelt",
                  "@[[candidate]]\n@fluids = \"R-290\"\n" + kRest,
                  {"neither", R"(unknown key "fluids" (did you mean "fluid"?))"}},
        Malformed{"title of a wrong type",
                  "title = @3\n" + kFluid + kRest,
                  {R"("title" takes text, not a number)"}},
        Malformed{"equation unknown",
                  "equation = @\"peng-robinsen\"\n" + kFluid + kRest,
                  {R"(unknown equation "peng-robinsen": "reference" | "peng-robinson" | "soave")"}},
        Malformed{"basis unknown", "basis = @\"mole\"\n" + kFluid + kRest, {R"(unknown basis "mole")"}},
        Malformed{"beyond validity unknown",
                  "beyond_validity = @\"ignore\"\n" + kFluid + kRest,
                  {R"("compute" | "refuse")"}},
        Malformed{"candidate with one bracket",
                  "@[candidate]\nfluid = \"R-290\"\n" + kRest,
                  {"two brackets: [[candidate]]"}},
        Malformed{"no candidates", "candidate = @[]\n" + kRest, {"an empty list"}},
        Malformed{"candidates that are no tables",
                  "candidate = [@\"R-290\"]\n" + kRest,
                  {R"("candidate" takes tables, [[candidate]], not text)"}},
        Malformed{"collect that is no table",
                  "collect = @[\"rho\"]\n" + kFluid + kT + kP,
                  {R"("collect" takes a table, [collect], not a list)"}},
        Malformed{
            "reference state wrong in each key",
            kFluid + kRest +
                "[reference_state]\nstate = @\"ideal gas\"\nT = @\"1 bar\"\nh = @\"200 kJ\"\ns = @true\n",
            {R"(unknown state "ideal gas": "saturated liquid")", R"(does not convert to "K")",
             R"(does not convert to "J/kg")", "not true or false"}},
        Malformed{"reference state below 0 K",
                  kFluid + kRest + "[reference_state]\nT = @\"-300 degC\"\n",
                  {"T must be above 0 K"}}),
    indexOf);

INSTANTIATE_TEST_SUITE_P(
    Candidates, MalformedText,
    ::testing::Values(
        Malformed{"fluid unknown",
                  "[[candidate]]\nfluid = @\"R-29O\"\n" + kRest,
                  {R"(unknown fluid "R-29O" (did you mean "R-290"?))"}},
        Malformed{"component unknown",
                  "[[candidate]]\nequation = \"soave\"\ncomponents = [\"R-32\", @\"R-1234yg\"]\nfractions = "
                  "[0.5, 0.5]\nfractions_by = \"mass\"\n" +
                      kRest,
                  {R"(unknown fluid "R-1234yg")"}},
        Malformed{"fluid that is a number",
                  "[[candidate]]\nfluid = @290\n" + kRest,
                  {R"("fluid" takes text, not a number)"}},
        Malformed{"fluid without a reference equation",
                  "[[candidate]]\nfluid = @\"ethanol\"\n" + kRest,
                  {R"(no reference equation of "ethanol" is known here: write equation = "peng-robinson")"}},
        Malformed{"blend by the reference equation",
                  "[[candidate]]\nequation = @\"reference\"\ncomponents = [\"R-32\", \"R-125\"]\nfractions = "
                  "[0.5, 0.5]\nfractions_by = \"mass\"\n" +
                      kRest,
                  {R"(blends have no reference equation yet: write equation = "peng-robinson")"}},
        Malformed{"designated blend by the default equation",
                  "[[candidate]]\nfluid = @\"R-410A\"\n" + kRest,
                  {R"(blends have no reference equation yet: write equation = "peng-robinson")"}},
        Malformed{"fractions that do not sum to 1",
                  "[[candidate]]\nequation = \"soave\"\ncomponents = [\"R-32\", \"R-125\"]\nfractions = "
                  "@[0.5, 0.4]\nfractions_by = \"mass\"\n" +
                      kRest,
                  {"fractions sum to 0.9, not to 1 (within 1e-6)"}},
        Malformed{"fractions in per cent",
                  "[[candidate]]\nequation = \"soave\"\ncomponents = [\"R-32\", \"R-125\"]\nfractions = "
                  "@[50, 50]\nfractions_by = \"mass\"\n" +
                      kRest,
                  {"write parts of 1, not per cent"}},
        Malformed{"a fraction too few",
                  "[[candidate]]\nequation = \"soave\"\ncomponents = [\"R-32\", \"R-125\"]\nfractions = "
                  "@[1.0]\nfractions_by = \"mass\"\n" +
                      kRest,
                  {"1 fractions for 2 components"}},
        Malformed{"fraction below 0",
                  "[[candidate]]\nequation = \"soave\"\ncomponents = [\"R-32\", \"R-125\"]\nfractions = "
                  "[1.5, @-0.5]\nfractions_by = \"mass\"\n" +
                      kRest,
                  {"a fraction must be above 0"}},
        Malformed{"fractions by nothing",
                  "[[candidate]]\nequation = \"soave\"\ncomponents = [\"R-32\", \"R-125\"]\nfractions = "
                  "@[0.5, 0.5]\n" +
                      kRest,
                  {R"(fractions_by = "mass" or "mole")"}},
        Malformed{"fractions by volume",
                  "[[candidate]]\nequation = \"soave\"\ncomponents = [\"R-32\", \"R-125\"]\nfractions = "
                  "[0.5, 0.5]\nfractions_by = @\"volume\"\n" +
                      kRest,
                  {R"(unknown fractions_by "volume": "mass" | "mole")"}},
        Malformed{"blend without fractions",
                  "[[candidate]]\nequation = \"soave\"\ncomponents = @[\"R-32\", \"R-125\"]\n" + kRest,
                  {R"(a blend has "fractions" = [...] or a "lattice")"}},
        Malformed{"fluid with fractions",
                  "[[candidate]]\nfluid = \"R-290\"\nfractions = @[1]\n" + kRest,
                  {R"("fractions" does not go with "fluid")"}},
        Malformed{
            "candidate of nothing", "@[[candidate]]\n" + kRest, {R"(neither "fluid" nor "components")"}},
        Malformed{
            "lattice without a step",
            "[[candidate]]\nequation = \"soave\"\ncomponents = [\"R-32\", \"R-125\"]\nlattice = @0\n" + kRest,
            {R"("lattice" takes a whole number from 1 to 1 000, not 0)"}},
        Malformed{
            "lattice too fine",
            "[[candidate]]\nequation = \"soave\"\ncomponents = [\"R-32\", \"R-125\"]\nlattice = @1001\n" +
                kRest,
            {R"(from 1 to 1 000, not 1001)"}},
        Malformed{"lattice and fractions",
                  "[[candidate]]\nequation = \"soave\"\ncomponents = [\"R-32\", \"R-125\"]\nfractions = "
                  "[0.5, 0.5]\nlattice = @10\n" +
                      kRest,
                  {R"("lattice" and "fractions" exclude each other)"}},
        Malformed{"lattice of one",
                  "[[candidate]]\nequation = \"soave\"\ncomponents = [\"R-32\"]\nlattice = @10\n" + kRest,
                  {"a lattice has two components or more"}},
        Malformed{"nine components",
                  "[[candidate]]\nequation = \"soave\"\ncomponents = @[\"R-32\", \"R-125\", \"R-134a\", "
                  "\"R-143a\", \"R-290\", \"R-600a\", \"R-152a\", \"R-23\", \"R-170\"]\nlattice = 2\n" +
                      kRest,
                  {"1 to 8 components, not 9"}},
        Malformed{
            "component twice",
            "[[candidate]]\nequation = \"soave\"\ncomponents = [\"R-290\", @\"propane\"]\nlattice = 2\n" +
                kRest,
            {R"("propane" is a component already)"}},
        Malformed{
            "blend as a component",
            "[[candidate]]\nequation = \"soave\"\ncomponents = [\"R-290\", @\"R-410A\"]\nlattice = 2\n" +
                kRest,
            {R"("R-410A" is a blend itself)"}},
        Malformed{"candidate twice",
                  kFluid + "[[candidate]]\nfluid = @\"Propane\"\n" + kRest,
                  {"the same candidate stands in line 2"}},
        Malformed{
            "blend twice, in another order",
            "[[candidate]]\nequation = \"soave\"\ncomponents = [\"R-32\", \"R-125\"]\nlattice = "
            "2\n[[candidate]]\nequation = \"soave\"\ncomponents = @[\"R-125\", \"R-32\"]\nlattice = 2\n" +
                kRest,
            {"the same candidate stands in line 3"}},
        Malformed{"saturated states of a blend",
                  "[[candidate]]\nequation = \"soave\"\ncomponents = @[\"R-32\", \"R-125\"]\nlattice = 2\n" +
                      kT + kBeta + kCollect,
                  {"axes with beta are for pure fluids"}}),
    indexOf);

TEST(MalformedStudies, AreReportedWithAllMistakesAtOnceInFileOrder) {
  std::string text =
      "basis = @\"weight\"\n"
      "[[candidate]]\nfluid = @\"R-29O\"\n"
      "[[candidate]]\nfluid = \"R-290\"\nequation = @\"srk\"\n"
      "[[axis]]\nquantity = \"T\"\nfrom = @\"1 bar\"\nto = 400\ncount = @0\n" +
      kP + "[collect]\nquantities = [@\"T\"]\npartials = [\"(dh/d@q)_T\"]\n[@plots]\n";
  const auto marks = takeMarks(text);
  const auto reading = readStudy("x", text, library(), StudyLimits{});
  ASSERT_EQ(reading.diagnostics.size(), marks.size()) << render("x.toml", reading.diagnostics);
  for (std::size_t i = 0; i < marks.size(); ++i) {
    EXPECT_EQ(reading.diagnostics[i].line, marks[i].line);
    EXPECT_EQ(reading.diagnostics[i].column, marks[i].column);
  }
}

TEST(MalformedStudies, AreShownAsCompilersDo) {
  EXPECT_EQ(render("studies/x.toml", {{14, 9, "unknown fluid \"R-29O\""}, {0, 0, "no axes"}}),
            "studies/x.toml:14:9: error: unknown fluid \"R-29O\"\nstudies/x.toml: error: no axes\n");
}

TEST(MalformedStudies, OfTheFileAsAWholeHaveNoPlace) {
  const auto reading = readStudy("x", "", library(), StudyLimits{});
  EXPECT_EQ(render("x.toml", reading.diagnostics),
            "x.toml: error: a study has at least one [[candidate]]\n"
            "x.toml: error: a study has two axes, each an [[axis]]\n"
            "x.toml: error: a study says what to collect: [collect] with quantities and partials\n");
}

TEST(MalformedStudies, NestedWithoutEndAreRefused) {
  const auto reading = readStudy("x", "title = " + std::string(100'000, '['), library(), StudyLimits{});
  ASSERT_EQ(reading.diagnostics.size(), 1u);
  EXPECT_EQ(reading.diagnostics[0].line, 1);
}

TEST(MalformedStudies, OfThousandsOfLongAxesAreRefusedAtOnce) {
  std::string axes;
  for (int i = 0; i < 10'000; ++i)
    axes += "[[axis]]\nquantity = \"T\"\nfrom = 300\nto = 400\ncount = 100000\n";
  EXPECT_FALSE(readStudy("x", kFluid + axes + kCollect, library(), StudyLimits{}).plan.has_value());
}

TEST(MalformedStudies, LongerThanAMebibyteAreNotRead) {
  const auto reading = readStudy("x", std::string(1024 * 1024 + 1, '#'), library(), StudyLimits{});
  ASSERT_EQ(reading.diagnostics.size(), 1u);
  EXPECT_THAT(reading.diagnostics[0].message, HasSubstr("at most 1 MiB of text, not 1 048 577 bytes"));
}

TEST(MalformedStudies, WithMorePointsThanTheLimitSayBoth) {
  const auto reading = readStudy("x", kFluid + kRest, library(), StudyLimits{.points = 5});
  ASSERT_EQ(reading.diagnostics.size(), 1u);
  EXPECT_THAT(reading.diagnostics[0].message, HasSubstr("the study has 6 points; the limit is 5"));
}

TEST(MalformedStudies, OfCountlessCompositionsAreRefusedWithoutCountingThem) {
  const auto reading = readStudy("x",
                                 "[[candidate]]\nequation = \"soave\"\nlattice = 1000\n"
                                 "components = [\"R-32\", \"R-125\", \"R-134a\", \"R-143a\", \"R-290\", "
                                 "\"R-600a\", \"R-152a\", \"R-23\"]\n" +
                                     kRest,
                                 library(), StudyLimits{});
  ASSERT_EQ(reading.diagnostics.size(), 1u);
  EXPECT_THAT(reading.diagnostics[0].message, HasSubstr("1 224 195 198 550 172 706 points"));  // 6 C(1007, 7)
}

TEST(StudyNames, AreLowerCaseAndNotTheStoresOwn) {
  for (const char* const good : {"x", "sco2_inlet", "2026_07", "study_of_tests", "points"})
    EXPECT_TRUE(readStudy(good, kFluid + kRest, library(), StudyLimits{}).plan.has_value()) << good;
  for (const char* const bad : {"", "Inlet", "my study", "a-b", "é", "a;drop"}) {
    const auto reading = readStudy(bad, kFluid + kRest, library(), StudyLimits{});
    ASSERT_EQ(reading.diagnostics.size(), 1u) << bad;
    EXPECT_THAT(reading.diagnostics[0].message, HasSubstr("a-z, 0-9 and _"));
  }
  for (const char* const taken :
       {"store", "study", "quantity", "fluid", "candidate", "reference_used", "composition",
        "composition_part", "job", "phase", "outcome", "absence", "points_x", "sqlite_x"}) {
    const auto reading = readStudy(taken, kFluid + kRest, library(), StudyLimits{});
    ASSERT_EQ(reading.diagnostics.size(), 1u) << taken;
    EXPECT_THAT(reading.diagnostics[0].message, HasSubstr("the store needs the name"));
  }
}

}  // namespace
}  // namespace holdfast::coordinator
