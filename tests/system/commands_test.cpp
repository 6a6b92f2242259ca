// `holdfast evaluate` and `holdfast fluids` as a user has them: words in; answers, cautions and exit status
// out.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <array>
#include <cstdio>
#include <cstdlib>
#include <fstream>
#include <sstream>

#include "tests/support/process.hpp"
#include "tests/support/stand_in.hpp"

namespace holdfast {
namespace {

using testing::AllOf;
using testing::HasSubstr;
using testing::IsEmpty;
using testing::Not;
using testing::StartsWith;

/// What a program left behind.
struct Ended {
  int status = 0;
  std::string out;
  std::string errors;
};

class CommandsTest : public testing::Test {
 protected:
  /// Runs the program to its end. The shell only parts standard error from standard output.
  Ended holdfast(const std::vector<std::string>& words) const {
    const std::filesystem::path errors = folder / "errors";
    std::vector<std::string> command{"/bin/sh", "-c", R"(exec "$@" 2>"$0")", errors.string(),
                                     tests::program("holdfast")};
    command.insert(command.end(), words.begin(), words.end());
    tests::Process process(std::move(command), folder / "out");
    Ended ended;
    ended.status = process.wait();
    ended.out = process.output();
    std::ifstream stream(errors);
    ended.errors.assign(std::istreambuf_iterator<char>(stream), {});
    return ended;
  }
  Ended evaluate(std::vector<std::string> words) const {
    words.insert(words.begin(), "evaluate");
    return holdfast(words);
  }
  std::string file(const std::string& name, const std::string& text) const {
    std::ofstream(folder / name, std::ios::binary) << text;
    return (folder / name).string();
  }
  tests::TemporaryFolder folder;
};

/// The lines of a CSV answer, which end with CR LF (RFC 4180), cut at commas. No field here has quotes.
std::vector<std::vector<std::string>> fieldsOf(const std::string& csv) {
  std::vector<std::vector<std::string>> rows;
  std::istringstream lines(csv);
  for (std::string line; std::getline(lines, line);) {
    EXPECT_THAT(line, testing::EndsWith("\r"));
    line.pop_back();
    rows.emplace_back(1);
    for (const char c : line)
      if (c == ',')
        rows.back().emplace_back();
      else
        rows.back().back() += c;
  }
  return rows;
}

std::size_t countOf(const std::string& word, const std::string& text) {
  std::size_t count = 0;
  for (std::size_t at = text.find(word); at != std::string::npos; at = text.find(word, at + 1)) ++count;
  return count;
}

double number(const std::string& text) {
  return std::strtod(text.c_str(), nullptr);
}

// IAPWS R6-95(2018), Table 7, row 300 K, 996.5560 kg/m3. Half a unit of the last printed digit.
TEST_F(CommandsTest, EvaluateGivesAPrintedStateOfWater) {
  const Ended ended = evaluate(
      {"--fluid", "R-718", "--at", "T=300K", "--at", "rho=996.556", "--want", "p,cv,w", "--format", "csv"});
  ASSERT_EQ(ended.status, 0) << ended.errors;
  const auto rows = fieldsOf(ended.out);
  ASSERT_EQ(rows.size(), 2);
  EXPECT_EQ(rows[0], (std::vector<std::string>{"p", "cv", "w"}));
  EXPECT_NEAR(number(rows[1].at(0)), 0.992418352e5, 0.5e-4);
  EXPECT_NEAR(number(rows[1].at(1)), 4.13018112e3, 0.5e-5);
  EXPECT_NEAR(number(rows[1].at(2)), 1501.51914, 0.5e-5);
}

TEST_F(CommandsTest, EvaluateReadsUnitsAndTheTwoHalvesInAnyOrder) {
  const auto answer = [&](const std::string& first, const std::string& second) {
    return evaluate({"--fluid", "R-290", "--at", first, "--at", second, "--want", "rho,h", "--format", "csv"})
        .out;
  };
  const std::string plain = answer("T=273.15", "p=1e5");
  ASSERT_EQ(fieldsOf(plain).size(), 2);
  EXPECT_EQ(answer("T=0 degC", "p=1 bar"), plain);
  EXPECT_EQ(answer("p=0.1MPa", "T=273.15 K"), plain);
}

// 17 significant digits name one double and no other (IEEE 754-2019, 5.12.2): read and printed again they
// are the same text, which fewer digits are not.
TEST_F(CommandsTest, CsvAndJsonPrintTheSameSeventeenDigits) {
  const std::vector<std::string> words = {"--fluid", "R-290",  "--at",   "T=300K",
                                          "--at",    "p=1MPa", "--want", "rho,h,(dh/dp)_T"};
  const auto as = [&](const std::string& format) {
    auto all = words;
    all.insert(all.end(), {"--format", format});
    return evaluate(all);
  };
  const Ended csv = as("csv");
  const Ended json = as("json");
  ASSERT_EQ(csv.status, 0) << csv.errors;
  ASSERT_EQ(json.status, 0) << json.errors;
  const auto rows = fieldsOf(csv.out);
  ASSERT_EQ(rows.size(), 2);
  ASSERT_EQ(rows[1].size(), 3);
  for (std::size_t c = 0; c < 3; ++c) {
    std::array<char, 40> again{};
    std::snprintf(again.data(), again.size(), "%.17g", number(rows[1][c]));
    EXPECT_EQ(rows[1][c], again.data());
    EXPECT_THAT(json.out, HasSubstr("\"" + rows[0][c] + "\": " + rows[1][c]));
  }
  EXPECT_THAT(json.out, HasSubstr(R"("phase": "liquid", "outcome": "ok")"));
}

TEST_F(CommandsTest, CsvHeaderIsTheListAsWrittenWithCommasQuoted) {
  const std::string name = "z[neopentane (2,2-dimethylpropane)]";
  const Ended ended =
      evaluate({"--fluid", "neopentane (2,2-dimethylpropane)", "--at", "T=350K", "--at", "p=1bar", "--want",
                name + ",(\xE2\x88\x82h/\xE2\x88\x82p)_T", "--format", "csv"});
  ASSERT_EQ(ended.status, 0) << ended.errors;
  EXPECT_THAT(ended.out, StartsWith("\"" + name + "\",(\xE2\x88\x82h/\xE2\x88\x82p)_T\r\n"));
}

TEST_F(CommandsTest, StatesOfAFileAreThoseAskedOneByOne) {
  const std::string states = file("states.csv", "p,T\r\n1e5,300\r\n1e6,300\r\n5e6,400\r\n");
  const Ended many =
      evaluate({"--fluid", "R-290", "--states", states, "--want", "rho,(dT/dp)_s", "--format", "csv"});
  ASSERT_EQ(many.status, 0) << many.errors;
  const auto rows = fieldsOf(many.out);
  ASSERT_EQ(rows.size(), 4);
  const std::array<std::array<const char*, 2>, 3> asked{
      {{"T=300", "p=1e5"}, {"T=300", "p=1e6"}, {"T=400", "p=5e6"}}};
  for (std::size_t k = 0; k < asked.size(); ++k) {
    const auto one = fieldsOf(evaluate({"--fluid", "R-290", "--at", asked[k][0], "--at", asked[k][1],
                                        "--want", "rho,(dT/dp)_s", "--format", "csv"})
                                  .out);
    // A solve that starts at its neighbour ends within rounding of one that does not, times conditioning.
    for (std::size_t c = 0; c < 2; ++c)
      EXPECT_NEAR(number(rows[k + 1].at(c)) / number(one.at(1).at(c)), 1, 1e-12) << k;
  }
}

TEST_F(CommandsTest, FilesOfStatesThatAreWrongSayWhere) {
  const std::array<std::pair<const char*, const char*>, 6> wrong{{
      {"", ":1: the header names two quantities"},
      {"T\n300\n", ":1: the header names two quantities"},
      {"T,p\n300,x\n", R"(:2: field "p": "x" is not a finite number)"},
      {"T,p\n300,inf\n", R"(:2: field "p": "inf" is not a finite number)"},
      {"T,p\n300,1e5\n300\n", ":3: 1 fields, the header has 2"},
      {"T,h\n300,1e5\n", "a state is given by (T,p), (T,rho), (T,beta) or (p,beta), not by (T,h)"},
  }};
  for (const auto& [text, message] : wrong) {
    const Ended ended = evaluate({"--fluid", "R-290", "--states", file("states.csv", text), "--want", "rho"});
    EXPECT_EQ(ended.status, 2) << text;
    EXPECT_THAT(ended.errors, HasSubstr(message)) << text;
    EXPECT_THAT(ended.out, IsEmpty()) << text;
  }
}

// One mole of each: the mass fractions are M_i / sum M. The two ways to say it are one state.
TEST_F(CommandsTest, FractionsByMoleAndByMassMeetInTheMolarMass) {
  const double first = (*tests::library()->find("R-32"))->M;
  const double second = (*tests::library()->find("R-1234yf"))->M;
  std::array<char, 80> by_mass{};
  std::snprintf(by_mass.data(), by_mass.size(), "%.17g/%.17g", first / (first + second),
                second / (first + second));
  const auto answer = [&](const std::string& fractions, const std::string& by) {
    const Ended ended = evaluate({"--fluid", "R-32/R-1234yf", "--fractions", fractions, "--by", by,
                                  "--equation", "peng-robinson", "--at", "T=300K", "--at", "p=1bar", "--want",
                                  "M,z[R-32]", "--format", "csv"});
    EXPECT_EQ(ended.status, 0) << ended.errors;
    return fieldsOf(ended.out).at(1);
  };
  const auto moles = answer("0.5/0.5", "mole");
  const auto masses = answer(by_mass.data(), "mass");
  EXPECT_NEAR(number(moles.at(0)), (first + second) / 2, 1e-16);
  EXPECT_NEAR(number(masses.at(0)), (first + second) / 2, 1e-16);
  EXPECT_NEAR(number(masses.at(1)), 0.5, 1e-15);
}

// ISO 817: the form with fractions in the name is by mass.
TEST_F(CommandsTest, TheNamedFormOfABlendIsByMass) {
  const auto answer = [&](std::vector<std::string> fluid) {
    fluid.insert(fluid.end(), {"--equation", "soave", "--at", "T=300K", "--at", "p=1bar", "--want", "M,rho",
                               "--format", "csv"});
    return evaluate(fluid);
  };
  const Ended named = answer({"--fluid", "R-32/R-125 (50/50)"});
  ASSERT_EQ(named.status, 0) << named.errors;
  EXPECT_EQ(answer({"--fluid", "R-32/R-125", "--fractions", "50/50", "--by", "mass"}).out, named.out);
  // R-410A is R-32/R-125 (50/50): ISO 817, ASHRAE 34 (from memory).
  EXPECT_EQ(answer({"--fluid", "R-410A"}).out, named.out);
}

TEST_F(CommandsTest, MolarBasisIsMassBasisTimesTheMolarMass) {
  const auto answer = [&](const std::string& basis) {
    return fieldsOf(evaluate({"--fluid", "R-290", "--basis", basis, "--at", "T=300K", "--at", "p=1bar",
                              "--want", "rho,cp,w,M", "--format", "csv"})
                        .out)
        .at(1);
  };
  const auto mass = answer("mass");
  const auto molar = answer("molar");
  const double M = number(mass.at(3));
  EXPECT_NEAR(number(mass.at(0)) / (number(molar.at(0)) * M), 1, 1e-15);
  EXPECT_NEAR(number(molar.at(1)) / (number(mass.at(1)) * M), 1, 1e-15);
  EXPECT_EQ(molar.at(2), mass.at(2));
}

TEST_F(CommandsTest, ACoordinatorAnswersAsTheProgramItself) {
  const std::vector<std::string> words = {"--fluid",  "R-290",  "--at",   "beta=0.25",
                                          "--at",     "T=300K", "--want", "p,h,cp,(dp/dT)_sat",
                                          "--format", "json"};
  const Ended here = evaluate(words);
  const tests::ServeProcess coordinator(folder / "store", folder / "serve");
  auto remote = words;
  remote.insert(remote.end(), {"--coordinator", coordinator.address});
  const Ended there = evaluate(remote);
  EXPECT_EQ(there.status, 0) << there.errors;
  EXPECT_EQ(there.out, here.out);
  EXPECT_EQ(there.errors, here.errors);
  // What the coordinator finds wrong is wrong usage too.
  EXPECT_EQ(evaluate({"--fluid", "R-290", "--at", "T=300K", "--at", "p=1bar", "--want", "(dh/dq)_T",
                      "--coordinator", coordinator.address})
                .status,
            2);
}

TEST_F(CommandsTest, NoCoordinatorIsFailedWorkNotWrongUsage) {
  // Port 1 is tcpmux (IANA), which nobody serves.
  const Ended ended = evaluate({"--fluid", "R-290", "--at", "T=300K", "--at", "p=1bar", "--want", "rho",
                                "--coordinator", "127.0.0.1:1"});
  EXPECT_EQ(ended.status, 1);
  EXPECT_THAT(ended.out, IsEmpty());
  EXPECT_THAT(ended.errors, Not(IsEmpty()));
}

// A pure fluid in two phases has no cp: p and T depend on each other (Clapeyron). That is an answer.
TEST_F(CommandsTest, WhatDoesNotExistIsEmptyOrNullWithItsReasonAndIsNoFailure) {
  const auto as = [&](const std::string& format) {
    return evaluate({"--fluid", "R-290", "--at", "T=300K", "--at", "beta=0.5", "--want", "T,cp,beta",
                     "--format", format});
  };
  const Ended csv = as("csv");
  EXPECT_EQ(csv.status, 0);
  EXPECT_EQ(csv.out, "T,cp,beta\r\n300,,0.5\r\n");
  EXPECT_THAT(csv.errors, HasSubstr("cp: its variables depend on each other"));
  EXPECT_THAT(as("json").out, HasSubstr("\"cp\": null"));
  const Ended table = as("table");
  EXPECT_THAT(table.out, AllOf(HasSubstr("two-phase"), HasSubstr("  -  ")));
}

TEST_F(CommandsTest, AStateThatCannotBeComputedIsExitOneAndTheOthersStand) {
  const std::string states = file("states.csv", "T,beta\n300,0.5\n400,0.5\n");  // T_c is 369.89 K
  const Ended ended = evaluate({"--fluid", "R-290", "--states", states, "--want", "T", "--format", "csv"});
  EXPECT_EQ(ended.status, 1);
  EXPECT_EQ(ended.out, "T\r\n300\r\n\r\n");
  EXPECT_THAT(ended.errors, HasSubstr("state 2: undefined: "));
  EXPECT_THAT(ended.errors, Not(HasSubstr("state 1")));
}

TEST_F(CommandsTest, CautionStandsOnceOnStandardError) {
  const std::string states = file("states.csv", "T,p\n300,1e5\n310,1e5\n320,1e5\n");
  for (const char* format : {"table", "csv", "json"}) {
    const Ended ended =
        evaluate({"--fluid", "R-290", "--states", states, "--want", "rho,h", "--format", format});
    EXPECT_EQ(countOf("CAUTION", ended.errors), 1) << format;
    EXPECT_EQ(countOf("flammable", ended.errors), 1) << format;
    EXPECT_THAT(ended.errors, HasSubstr("local codes and licensed practice decide"));
    EXPECT_THAT(ended.out, Not(HasSubstr("CAUTION"))) << format;
  }
  // Ammonia is B2L, toxic; carbon dioxide works at high pressure: ISO 817 and common practice.
  const auto cautionOf = [&](const char* fluid) {
    return evaluate({"--fluid", fluid, "--at", "T=300K", "--at", "p=1bar", "--want", "rho"}).errors;
  };
  EXPECT_THAT(cautionOf("R-717"), HasSubstr("toxic: R-717"));
  EXPECT_THAT(cautionOf("R-744"), HasSubstr("high pressure: R-744"));
  // Class A1 at a boiling point near room temperature (ISO 817, from memory): nothing to say.
  EXPECT_THAT(cautionOf("R-1233zd(E)"), IsEmpty());
}

TEST_F(CommandsTest, WrongWordsOfEvaluateAreExitTwoAndSayWhatIsWrong) {
  struct Wrong {
    std::vector<std::string> words;
    const char* message;
  };
  const std::vector<std::string> state = {"--at", "T=300K", "--at", "p=1bar"};
  const auto propane = [&](std::vector<std::string> more) {
    more.insert(more.begin(), {"--fluid", "R-290"});
    return more;
  };
  const auto at = [&](std::vector<std::string> more) {
    more.insert(more.end(), state.begin(), state.end());
    return more;
  };
  const std::vector<Wrong> examples = {
      {{}, "--fluid is required"},
      {at(propane({})), "--want is required"},
      {at({"--fluid", "R-29O", "--want", "rho"}), R"(unknown fluid "R-29O" (did you mean "R-290"?))"},
      {propane({"--want", "rho"}), "--at: a state needs two"},
      {propane({"--want", "rho", "--at", "T=300K"}), "--at: a state needs two"},
      {propane({"--want", "rho", "--at", "T=300K", "--at", "1bar"}), "is not of the form T=300K"},
      {propane({"--want", "rho", "--at", "T=300bar", "--at", "p=1bar"}), R"(does not convert to "K")"},
      {propane({"--want", "rho", "--at", "T=300K", "--at", "T=310K"}), "not by (T,T)"},
      {propane({"--want", "rho", "--at", "T=300K", "--at", "s=1000"}), "not by (T,s)"},
      {at(propane({"--want", "rho,"})), "empty: a quantity such as rho"},
      {at(propane({"--want", "rho,(dh/dq)_T"})), R"("(dh/dq)_T", at character 6: "q" cannot stand here)"},
      {at(propane({"--want", "rho", "--format", "xml"})), "--format"},
      {at(propane({"--want", "rho", "--basis", "volume"})), "--basis"},
      {at(propane({"--want", "rho", "--by", "volume"})), "--by"},
      {at(propane({"--want", "rho", "--equation", "ideal"})), R"(must be "reference", "peng-robinson")"},
      {at(propane({"--want", "rho", "--states", "none.csv"})), "--states: not together with --at"},
      {propane({"--want", "rho", "--states", "none.csv"}), "none.csv: cannot be read"},
      {at({"--fluid", "R-32/R-1234yf", "--want", "rho"}), "--fractions: a blend needs them"},
      {at({"--fluid", "R-32/R-1234yf", "--fractions", "1", "--want", "rho"}), "one a component is needed"},
      {at({"--fluid", "R-32/R-1234yf", "--fractions", "0.5/0.6", "--want", "rho"}), "do not sum to 1"},
      {at({"--fluid", "R-32/R-1234yf", "--fractions", "nan/0.5", "--want", "rho"}), "is not a fraction"},
      {at({"--fluid", "R-32/R-125 (50/50)", "--fractions", "0.5/0.5", "--want", "rho"}),
       "has its fractions already"},
      // Never a silent fallback to another equation.
      {at({"--fluid", "R-32/R-1234yf", "--fractions", "0.5/0.5", "--want", "rho"}),
       "blends of reference equations are not available yet"},
  };
  for (const Wrong& wrong : examples) {
    const Ended ended = evaluate(wrong.words);
    EXPECT_EQ(ended.status, 2) << wrong.message;
    EXPECT_THAT(ended.errors, HasSubstr(wrong.message));
    EXPECT_THAT(ended.out, IsEmpty()) << wrong.message;
  }
}

TEST_F(CommandsTest, FluidsListsEveryFluidAndBlend) {
  const Ended ended = holdfast({"fluids"});
  EXPECT_EQ(ended.status, 0);
  for (const thermo::Fluid& fluid : tests::library()->fluids())
    EXPECT_THAT(ended.out, AllOf(HasSubstr(fluid.name), HasSubstr(fluid.designation)));
  for (const thermo::Blend& blend : tests::library()->blends())
    EXPECT_THAT(ended.out, HasSubstr(blend.designation));
  EXPECT_THAT(ended.out, HasSubstr("local codes and licensed practice decide"));
}

TEST_F(CommandsTest, FluidsShowsWhatIsKnownAndWhereItComesFrom) {
  const Ended ended = holdfast({"fluids", "R-290"});
  EXPECT_EQ(ended.status, 0);
  const thermo::Fluid& fluid = **tests::library()->find("R-290");
  const thermo::ReferenceFluid& reference = tests::library()->references()[fluid.reference.value()];
  EXPECT_THAT(ended.out, StartsWith("R-290\n"));
  EXPECT_THAT(ended.out, AllOf(HasSubstr("propane"), HasSubstr("74-98-6"), HasSubstr("C3H8")));
  // Flammability class of propane: ISO 817 (from memory). The equation and its validity: Lemmon, McLinden,
  // Wagner, J. Chem. Eng. Data 54 (2009) 3141: 85.525 K to 650 K, up to 1000 MPa.
  EXPECT_THAT(ended.out, HasSubstr("A3 (ISO 817)"));
  EXPECT_THAT(ended.out, HasSubstr("J. Chem. Eng. Data 54 (2009) 3141"));
  EXPECT_THAT(ended.out, HasSubstr("85.525 K to 650 K, up to 1e+09 Pa"));
  ASSERT_FALSE(reference.evidence.empty());
  EXPECT_THAT(ended.out, HasSubstr(reference.evidence));
  ASSERT_FALSE(fluid.gwp_source.empty());
  EXPECT_THAT(ended.out, HasSubstr("(" + fluid.gwp_source + ")"));
  EXPECT_TRUE(std::regex_search(ended.out, std::regex("CAUTION +flammable")));
  EXPECT_THAT(ended.out, HasSubstr("local codes and licensed practice decide"));
}

TEST_F(CommandsTest, FluidsTakesNamesAndCasNumbers) {
  const std::string shown = holdfast({"fluids", "R-290"}).out;
  EXPECT_EQ(holdfast({"fluids", "propane"}).out, shown);
  EXPECT_EQ(holdfast({"fluids", "74-98-6"}).out, shown);
}

// R-410A is R-32/R-125 (50/50), class A1: ISO 817, ASHRAE 34 (from memory).
TEST_F(CommandsTest, FluidsShowsADesignatedBlendWithTheCautionsOfItsComponents) {
  const Ended ended = holdfast({"fluids", "R-410A"});
  EXPECT_EQ(ended.status, 0);
  EXPECT_THAT(ended.out, StartsWith("R-410A (zeotrope)\n"));
  EXPECT_EQ(countOf("50 % by mass", ended.out), 2);
  EXPECT_THAT(ended.out, HasSubstr("A1 (ISO 817)"));
  EXPECT_THAT(ended.out, HasSubstr("kij = "));
  EXPECT_TRUE(std::regex_search(ended.out, std::regex("CAUTION R-32 +mildly flammable")));
  EXPECT_THAT(ended.out, HasSubstr("local codes and licensed practice decide"));
}

TEST_F(CommandsTest, AnUnknownNameOfFluidsIsExitTwoWithASuggestion) {
  const Ended ended = holdfast({"fluids", "R-29O"});
  EXPECT_EQ(ended.status, 2);
  EXPECT_EQ(ended.errors, "unknown fluid \"R-29O\" (did you mean \"R-290\"?)\n");
  EXPECT_THAT(ended.out, IsEmpty());
  EXPECT_EQ(holdfast({"fluids", "R-290", "R-600a"}).status, 2);
}

}  // namespace
}  // namespace holdfast
