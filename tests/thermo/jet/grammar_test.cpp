// Columns as a user writes them.
#include <gtest/gtest.h>

#include "thermo/jet/partial.hpp"

namespace holdfast::thermo {
namespace {

ColumnExpression good(const std::string& text) {
  auto parsed = parseColumn(text);
  if (const auto* fault = std::get_if<GrammarError>(&parsed)) {
    ADD_FAILURE() << text << ": " << fault->message;
    return {QuantityColumn{Quantity::T, ""}, ""};
  }
  return std::get<ColumnExpression>(parsed);
}

struct Good {
  const char* text;
  const char* canonical;
  const char* name;
};

TEST(Grammar, TakesWhatATextbookWrites) {
  const Good table[] = {
      {"rho", "rho", "rho"},
      {"  cp ", "cp", "cp"},
      {"mu_JT", "mu_JT", "mu_JT"},
      {"kappa_s", "kappa_s", "kappa_s"},
      {"beta", "beta", "beta"},
      {"M", "M", "M"},
      {"x[R-32]", "x[R-32]", "x_R_32"},
      {"y[ R-1234ze(E) ]", "y[R-1234ze(E)]", "y_R_1234ze_E"},
      {"z[neopentane (2,2-dimethylpropane)]", "z[neopentane (2,2-dimethylpropane)]",
       "z_neopentane_2_2_dimethylpropane"},
      {"(dh/dp)_T", "(dh/dp)_T", "dh_dp_at_T"},
      {"( d h / d p ) _ T", "(dh/dp)_T", "dh_dp_at_T"},
      {"(\xE2\x88\x82h/\xE2\x88\x82p)_T", "(dh/dp)_T", "dh_dp_at_T"},
      {"(drho/dT)_p", "(drho/dT)_p", "drho_dT_at_p"},
      {"(du/dv)_s", "(du/dv)_s", "du_dv_at_s"},
      {"(da/dg)_rho", "(da/dg)_rho", "da_dg_at_rho"},
      {"(dh/dv)_rho", "(dh/dv)_rho",
       "dh_dv_at_rho"},  // grammatical; does not exist anywhere, says the algebra
      {"(dp/dT)_sat", "(dp/dT)_sat", "dp_dT_at_sat"},
      {"(dT/dp)_sat", "(dT/dp)_sat", "dT_dp_at_sat"},
      {"(dh'/dT)_sat", "(dh'/dT)_sat", "dh_liq_dT_at_sat"},
      {"(dv''/dT)_sat", "(dv''/dT)_sat", "dv_vap_dT_at_sat"},
      {"(ds '' / dp)_sat", "(ds''/dp)_sat", "ds_vap_dp_at_sat"},
  };
  for (const Good& each : table) {
    const ColumnExpression column = good(each.text);
    EXPECT_EQ(column.written_as, each.canonical);
    EXPECT_EQ(columnName(column), each.name);
    EXPECT_FALSE(unitOf(column, Basis::mass).empty());
    EXPECT_FALSE(meaningOf(column).empty());
  }
}

struct Bad {
  const char* text;
  std::size_t offset;
  const char* message;
};

TEST(Grammar, PointsAtTheCharacterThatIsWrong) {
  const char* takes = "; a partial takes T p v rho u h s a g";
  const auto cannot = [&](const std::string& word) { return "\"" + word + "\" cannot stand here" + takes; };
  const std::pair<Bad, std::string> table[] = {
      {{"", 0, ""}, "empty: a quantity such as rho, or a partial such as (dh/dp)_T, is expected"},
      {{"   ", 3, ""}, "empty: a quantity such as rho, or a partial such as (dh/dp)_T, is expected"},
      {{"q", 0, ""}, "unknown quantity \"q\""},
      {{"Rho", 0, ""}, "unknown quantity \"Rho\""},
      {{"+", 0, ""}, "a quantity or a partial is expected"},
      {{"rho h", 4, ""}, "nothing may follow here"},
      {{"rho[R-32]", 3, ""}, "\"rho\" does not belong to a component"},
      {{"x", 1, ""}, "\"x\" needs a component, as in x[R-32]"},
      {{"x[R-32", 1, ""}, "\"]\" is missing"},
      {{"x[ ]", 2, ""}, "a component is expected, as in x[R-32]"},
      {{"(dq/dp)_T", 2, ""}, cannot("q")},
      {{"(dh/dq)_T", 5, ""}, cannot("q")},
      {{"(dh/dp)_q", 8, ""}, cannot("q")},
      {{"(dcp/dT)_p", 2, ""}, cannot("cp")},
      {{"(dh/dp)_", 8, ""}, std::string("a quantity is expected") + takes},
      {{"(dh/dp)", 7, ""}, "say what is held fast: _ and a quantity, as in (dh/dp)_T, or _sat"},
      {{"(dh/dp_T", 5, ""}, cannot("p_T")},
      {{"(dh dp)_T", 4, ""}, "\"/\" is expected between the two differentials"},
      {{"(h/dp)_T", 1, ""}, "\"d\" is expected"},
      {{"(dh/p)_T", 4, ""}, "\"d\" is expected"},
      {{"(d(dh/dp)_T/dT)_p", 2, ""}, "second partials are not available yet"},
      {{"(dh/dh)_T", 5, ""}, "a quantity is differentiated by itself"},
      {{"(dh/dT)_T", 8, ""}, "\"T\" is varied and held fast at once"},
      {{"(dT/dh)_T", 8, ""}, "\"T\" is held fast and differentiated at once"},
      {{"(dh'/dp)_T", 2, ""}, "' and '' belong to the saturation line: _sat"},
      {{"(dh/dT)_sat", 2, ""}, "say which side: h' of the liquid or h'' of the vapour"},
      {{"(dh'/ds)_sat", 6, ""}, "along saturation the variable is T or p"},
      {{"(dp'/dT)_sat", 2, ""}, "T and p are the same on both sides: without a mark"},
      {{"(dh'/dT')_sat", 6, ""}, "T and p are the same on both sides: without a mark"},
      {{"(dT/dT)_sat", 5, ""}, "a quantity is differentiated by itself"},
      {{"(dh/dp)_T x", 10, ""}, "nothing may follow here"},
  };
  for (const auto& [bad, message] : table) {
    const auto parsed = parseColumn(bad.text);
    const auto* fault = std::get_if<GrammarError>(&parsed);
    ASSERT_NE(fault, nullptr) << bad.text;
    EXPECT_EQ(fault->message, message) << bad.text;
    EXPECT_EQ(fault->offset, bad.offset) << bad.text;
  }
}

TEST(ColumnNames, ClashWithoutLetterCaseAndGetTheirLongForm) {
  const auto names = columnNames({good("Z"), good("z[R-32]"), good("rho")});
  ASSERT_TRUE(names.ok());
  EXPECT_EQ(*names, (std::vector<std::string>{"compressibility", "z_R_32", "rho"}));
  EXPECT_EQ(columnNames({good("rho"), good("h"), good("rho")}).error().message, "\"rho\" stands twice");
  const auto clash = columnNames({good("x[R-32]"), good("x[r 32]")});
  EXPECT_EQ(
      clash.error().message,
      "\"x[R-32]\" and \"x[r 32]\" would both be called x_r_32 in the store, which ignores letter case");
}

TEST(Units, FollowTheBasis) {
  EXPECT_EQ(unitOf(good("h"), Basis::mass), "J kg-1");
  EXPECT_EQ(unitOf(good("h"), Basis::molar), "J mol-1");
  EXPECT_EQ(unitOf(good("(dT/dp)_h"), Basis::mass), "kg-1 m s2 K");
  EXPECT_EQ(unitOf(good("(dh/dT)_p"), Basis::mass), "m2 s-2 K-1");
  EXPECT_EQ(unitOf(good("(dh/dT)_p"), Basis::molar), "kg mol-1 m2 s-2 K-1");
  EXPECT_EQ(unitOf(good("(dv/drho)_p"), Basis::mass), "kg-2 m6");
  EXPECT_EQ(unitOf(good("(du/dh)_p"), Basis::mass), "1");
}

}  // namespace
}  // namespace holdfast::thermo
