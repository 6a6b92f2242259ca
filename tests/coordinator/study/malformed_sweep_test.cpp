// Malformed studies: axes and what is collected.
#include "tests/coordinator/study/malformed_support.hpp"

namespace holdfast::coordinator {
namespace {

class MalformedSweep : public MalformedStudy {};

TEST_P(MalformedSweep, IsReportedInItsPlace) {
  expectReportedInPlace(GetParam());
}

INSTANTIATE_TEST_SUITE_P(
    Axes, MalformedSweep,
    ::testing::Values(
        Malformed{"quantity that cannot be swept",
                  kFluid + kT + "[[axis]]\nquantity = @\"h\"\nvalues = [1]\n" + kCollect,
                  {R"(unknown quantity "h": "T" | "p" | "rho" | "beta")"}},
        Malformed{"axis of nothing",
                  kFluid + kT + "@[[axis]]\nvalues = [1]\n" + kCollect,
                  {R"(does not say its "quantity")"}},
        Malformed{"from missing",
                  kFluid + "@[[axis]]\nquantity = \"T\"\nto = 400\ncount = 3\n" + kP + kCollect,
                  {R"(no "from")"}},
        Malformed{"all missing",
                  kFluid + "@@@[[axis]]\nquantity = \"T\"\n" + kP + kCollect,
                  {R"(no "from")", R"(no "to")", R"(no "count")"}},
        Malformed{"count 0",
                  kFluid + "[[axis]]\nquantity = \"T\"\nfrom = 300\nto = 400\ncount = @0\n" + kP + kCollect,
                  {R"("count" takes a whole number from 1 to 100 000, not 0)"}},
        Malformed{"count 2.5",
                  kFluid + "[[axis]]\nquantity = \"T\"\nfrom = 300\nto = 400\ncount = @2.5\n" + kP + kCollect,
                  {R"("count" takes a whole number)"}},
        Malformed{"count 1 with two ends",
                  kFluid + "[[axis]]\nquantity = \"T\"\nfrom = 300\nto = 400\ncount = @1\n" + kP + kCollect,
                  {R"(one value cannot be both "from" and "to")"}},
        Malformed{"ends alike",
                  kFluid + "[[axis]]\nquantity = \"T\"\nfrom = 300\nto = @300\ncount = 4\n" + kP + kCollect,
                  {"are the same value"}},
        Malformed{"units of another quantity",
                  kFluid + "[[axis]]\nquantity = \"T\"\nfrom = @\"1 bar\"\nto = @\"20 C\"\ncount = 4\n" + kP +
                      kCollect,
                  {R"("1 bar" is in "bar" (100000 m-1.kg.s-2), which does not convert to "K")",
                   R"(did you mean "degC"?)"}},
        Malformed{"unit unknown",
                  kFluid + kT + "[[axis]]\nquantity = \"p\"\nvalues = [\"1 bar\", @\"2 barr\"]\n" + kCollect,
                  {R"(unknown unit "barr")"}},
        Malformed{
            "molar density in mass basis",
            kFluid + kT +
                "[[axis]]\nquantity = \"rho\"\nvalues = [@\"2 mol/l\"]\n[collect]\nquantities = [\"h\"]\n",
            {R"(does not convert to "kg/m3")"}},
        Malformed{"below 0 K",
                  kFluid + "[[axis]]\nquantity = \"T\"\nfrom = @\"-300 degC\"\nto = 400\ncount = 4\n" + kP +
                      kCollect,
                  {"T must be above 0 K, not -26.85 K"}},
        Malformed{"not finite",
                  kFluid + kT + "[[axis]]\nquantity = \"p\"\nvalues = [@inf, @nan]\n" + kCollect,
                  {"finite", "finite"}},
        Malformed{"beta above 1",
                  kFluid + kT + "[[axis]]\nquantity = \"beta\"\nvalues = [0, @1.5]\n" + kCollect,
                  {"between 0 and 1, not at 1.5"}},
        Malformed{"logarithm of 0",
                  kFluid + kT +
                      "[[axis]]\nquantity = \"beta\"\nfrom = @0\nto = 1\ncount = 4\nspacing = \"log\"\n" +
                      kCollect,
                  {R"(spacing "log" begins and ends above 0)"}},
        Malformed{"spacing unknown",
                  kFluid +
                      "[[axis]]\nquantity = \"T\"\nfrom = 300\nto = 400\ncount = 3\nspacing = @\"lin\"\n" +
                      kP + kCollect,
                  {R"(unknown spacing "lin": "linear" | "log")"}},
        Malformed{
            "values and a range",
            kFluid + "[[axis]]\nquantity = \"T\"\nvalues = [300]\nfrom = @300\nto = 400\n" + kP + kCollect,
            {R"("from" and "values" exclude each other)"}},
        Malformed{"no values",
                  kFluid + kT + "[[axis]]\nquantity = \"p\"\nvalues = @[]\n" + kCollect,
                  {"1 to 100 000 values, not 0"}},
        Malformed{"a value twice",
                  kFluid + kT + "[[axis]]\nquantity = \"p\"\nvalues = [\"1 bar\", 2e5, @1e5]\n" + kCollect,
                  {"has this value already"}},
        Malformed{
            "values that are none",
            kFluid + kT + "[[axis]]\nquantity = \"p\"\nvalues = [@true, @[1], @1979-05-27]\n" + kCollect,
            {"not true or false", "not a list", "not a date or time"}},
        Malformed{"axis twice",
                  kFluid + kT + "[[axis]]\nquantity = @\"T\"\nvalues = [300]\n" + kCollect,
                  {"an axis of T already"}},
        Malformed{
            "pair that gives no state",
            kFluid + kP + "[[axis]]\nquantity = @\"rho\"\nvalues = [1]\n[collect]\nquantities = [\"h\"]\n",
            {"T,p | T,rho | T,beta | p,beta; not p,rho"}},
        Malformed{"one axis", kFluid + "@" + kT + kCollect, {"this study has 1"}},
        Malformed{"three axes", kFluid + kT + kP + "@" + kBeta + kCollect, {"this study has 3"}},
        Malformed{"too many points",
                  kFluid +
                      "[[axis]]\nquantity = \"T\"\nfrom = 300\nto = 400\ncount = 100000\n[[axis]]\nquantity "
                      "= @\"p\"\nfrom = 1e5\nto = 2e5\ncount = 20000\n" +
                      kCollect,
                  {"the study has 2 000 000 000 points; the limit is 1 000 000 000"}}),
    indexOf);

INSTANTIATE_TEST_SUITE_P(
    Collect, MalformedSweep,
    ::testing::Values(
        Malformed{
            "nothing to collect", kFluid + kT + kP + "@[collect]\n", {"neither quantities nor partials"}},
        Malformed{"quantity unknown",
                  kFluid + kT + kP + "[collect]\nquantities = [\"rho\", \"@enthalpy\"]\n",
                  {R"(unknown quantity "enthalpy")"}},
        Malformed{"quantity that is a number",
                  kFluid + kT + kP + "[collect]\nquantities = [\"rho\", @3]\n",
                  {"a list of texts, not a number"}},
        Malformed{"quantities that are no list",
                  kFluid + kT + kP + "[collect]\nquantities = @\"rho\"\n",
                  {"a list of texts, not text"}},
        Malformed{"letter unknown inside a partial",
                  kFluid + kT + kP + "[collect]\npartials = [\"(dh/dp)_T\", \"(dh/d@q)_T\"]\n",
                  {R"("q" cannot stand here)"}},
        Malformed{"the same behind a sign of three bytes",
                  kFluid + kT + kP + "[collect]\npartials = [\"(∂h/∂@q)_T\"]\n",
                  {R"("q" cannot stand here)"}},
        Malformed{"the same in a string of several lines",
                  kFluid + kT + kP + "[collect]\npartials = [\"\"\"\n(dh/d@q)_T\"\"\"]\n",
                  {R"("q" cannot stand here)"}},
        Malformed{"the same behind an escape",
                  kFluid + kT + kP + "[collect]\npartials = [\"(\\u2202h/\\u2202@q)_T\"]\n",
                  {R"("q" cannot stand here)"}},
        Malformed{"side of saturation not said",
                  kFluid + kT + kBeta + "[collect]\npartials = [\"(d@h/dT)_sat\"]\n",
                  {"say which side"}},
        Malformed{"partial among quantities",
                  kFluid + kT + kP + "[collect]\nquantities = [@\"(dh/dp)_T\"]\n",
                  {"belongs in partials"}},
        Malformed{"quantity among partials",
                  kFluid + kT + kP + "[collect]\npartials = [@\"rho\"]\n",
                  {"belongs in quantities"}},
        Malformed{"column twice",
                  kFluid + kT + kP + "[collect]\npartials = [\"(dh/dp)_T\", @\"( ∂h / ∂p )_T\"]\n",
                  {"collected already (line 12)"}},
        Malformed{"axis as a column",
                  kFluid + kT + kP + "[collect]\nquantities = [@\"T\", \"rho\"]\n",
                  {R"("T" is an axis)"}},
        Malformed{"fraction of an unknown fluid",
                  kFluid + kT + kP + "[collect]\nquantities = [\"z[@R-29O]\"]\n",
                  {"unknown fluid"}},
        Malformed{"fraction of no component",
                  kFluid + kT + kP + "[collect]\nquantities = [\"z[@R-32]\"]\n",
                  {R"(no candidate has the component "R-32")"}},
        Malformed{"key unknown",
                  kFluid + kT + kP + "[collect]\nquantities = [\"rho\"]\n@derivatives = []\n",
                  {"[collect] has quantities and partials"}}),
    indexOf);

}  // namespace
}  // namespace holdfast::coordinator
