// Quantities with units. Expected values follow from the definitions of the units: the SI brochure (BIPM, 9th
// edition, 2019, with its table 8 and the definition of the degree Celsius), the standard atmosphere, and the
// international pound and inch (1959).
#include "coordinator/study/units.hpp"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <string>
#include <thread>
#include <variant>
#include <vector>

#include "thermo/jet/partial.hpp"

namespace holdfast::coordinator {
namespace {

using ::testing::HasSubstr;

struct Example {
  const char* text;
  const char* si_unit;
  double value;
};

TEST(Units, ConvertToSi) {
  const std::vector<Example> examples = {
      {"300", "K", 300},
      {"300 K", "K", 300},
      {"300K", "K", 300},
      {"+3e2 K", "K", 300},
      {"  300\tK ", "K", 300},
      {"-20 degC", "K", 253.15},
      {"-20 °C", "K", 253.15},
      {"0 celsius", "K", 273.15},
      {"212 degF", "K", 373.15},
      {"5 bar", "Pa", 5e5},
      {"1.5MPa", "Pa", 1.5e6},
      {"1 atm", "Pa", 101325},
      {"250 kPa", "Pa", 250e3},
      {"1 psi", "Pa", 0.45359237 * 9.80665 / (0.0254 * 0.0254)},
      {"200 kJ/kg", "J/kg", 200e3},
      {"1 kJ/(kg K)", "J/(kg K)", 1000},
      {"1 kJ/kg/K", "J/(kg K)", 1000},
      {"1 kJ kg-1 K-1", "J/(kg K)", 1000},
      {"0.5 g/cm3", "kg/m3", 500},
      {"2 mol/l", "mol/m3", 2000},
      {"50 %", "1", 0.5},
      {"0.25", "1", 0.25},
  };
  for (const Example& example : examples) {
    const auto value = parseQuantity(example.text, example.si_unit);
    ASSERT_TRUE(value) << value.error().message;
    // One conversion is a product and a sum: a few roundings.
    EXPECT_NEAR(*value, example.value, 1e-14 * std::abs(example.value)) << example.text;
  }
}

struct Wrong {
  const char* text;
  const char* si_unit;
  const char* message;
};

TEST(Units, ThatAreWrongSayWhatWouldBeRight) {
  const std::vector<Wrong> examples = {
      {"5 bar", "K", R"~("5 bar" is in "bar" (100000 m-1.kg.s-2), which does not convert to "K")~"},
      {"20 C", "K", R"~(does not convert to "K" (did you mean "degC"?))~"},
      {"70 F", "K", R"~((did you mean "degF"?))~"},
      {"1 kJ/kg K", "J/(kg K)",
       R"~("1 kJ/kg K" is in "kJ/kg K" (1000 m2.s-2.K), which does not convert to "J/(kg K)")~"},
      {"5 mol/m3", "kg/m3", R"~(does not convert to "kg/m3")~"},
      {"5 barr", "Pa", R"~(unknown unit "barr" in "5 barr")~"},
      {"five bar", "Pa", R"~("five bar" does not begin with a number)~"},
      {"", "Pa", R"~("" does not begin with a number)~"},
      {"bar", "Pa", "does not begin with a number"},
      {"nan K", "K", "does not begin with a number"},
      {"inf", "K", "does not begin with a number"},
      {"5,3 bar", "Pa", R"~("5,3 bar" has "," where a unit should begin)~"},
      {"5 3 bar", "Pa", R"~(has "3" where a unit should begin)~"},
      {"20 +5 K", "K", R"~(has "+" where a unit should begin)~"},
      {"1e999 K", "K", "too large or too small"},
      {"1e308 MPa", "Pa", "too large"},
  };
  for (const Wrong& example : examples) {
    const auto value = parseQuantity(example.text, example.si_unit);
    ASSERT_FALSE(value) << example.text;
    EXPECT_THAT(value.error().message, HasSubstr(example.message));
  }
}

TEST(Units, RefuseControlCharactersAndLongTexts) {
  EXPECT_FALSE(parseQuantity(std::string_view("5 \0bar", 6), "Pa"));
  EXPECT_FALSE(parseQuantity("5 " + std::string(10'000, '('), "Pa"));
}

TEST(Units, AreSafeFromManyThreads) {
  std::vector<std::thread> threads;
  std::vector<int> wrong(4, 0);
  for (std::size_t t = 0; t < wrong.size(); ++t)
    threads.emplace_back([&wrong, t] {
      for (int i = 0; i < 200; ++i) {
        const auto value = parseQuantity(std::to_string(i) + " degC", "K");
        if (!value || *value != i + 273.15) ++wrong[t];
        if (parseQuantity("1 nonsense", "K")) ++wrong[t];
      }
    });
  for (auto& thread : threads) thread.join();
  EXPECT_THAT(wrong, ::testing::Each(0));
}

// The store's units are for programs as well as people: UDUNITS-2 reads each of them.
TEST(Units, OfEveryColumnAreThoseOfUdunits) {
  const std::vector<std::string> bases = {"T", "p", "v", "rho", "u", "h", "s", "a", "g"};
  std::vector<std::string> texts = {"cv",    "cp",      "w",       "Z",       "beta",
                                    "mu_JT", "alpha_v", "kappa_T", "kappa_s", "M"};
  texts.insert(texts.end(), bases.begin(), bases.end());
  for (const std::string& x : bases)
    for (const std::string& y : bases)
      if (x != y)
        texts.push_back("(d" + x + "/d" + y + ")_" +
                        (x != "T" && y != "T"   ? "T"
                         : x != "p" && y != "p" ? "p"
                                                : "v"));
  for (const std::string& text : texts) {
    const auto parsed = thermo::parseColumn(text);
    ASSERT_TRUE(std::holds_alternative<thermo::ColumnExpression>(parsed)) << text;
    for (const auto basis : {thermo::Basis::mass, thermo::Basis::molar}) {
      const std::string unit = thermo::unitOf(std::get<thermo::ColumnExpression>(parsed), basis);
      const auto value = parseQuantity(unit == "1" ? "2" : "2 " + unit, unit);
      ASSERT_TRUE(value.ok()) << text << " in " << unit;
      EXPECT_DOUBLE_EQ(*value, 2);
    }
  }
}

}  // namespace
}  // namespace holdfast::coordinator
