// What makes two studies the same.
#include <gtest/gtest.h>

#include <set>
#include <vector>

#include "tests/coordinator/study/study_support.hpp"

namespace holdfast::coordinator {
namespace {

constexpr const char* kText =
    "title = \"a\"\nequation = \"peng-robinson\"\nbasis = \"mass\"\nbeyond_validity = \"compute\"\n"
    "[[candidate]]\ncomponents = [\"R-290\", \"R-600a\"]\nlattice = 4\nfractions_by = \"mole\"\n"
    "[[axis]]\nquantity = \"T\"\nfrom = 300\nto = 400\ncount = 11\nspacing = \"linear\"\n"
    "[[axis]]\nquantity = \"p\"\nvalues = [1e5, 2e5]\n"
    "[collect]\nquantities = [\"rho\", \"h\"]\npartials = [\"(dh/dp)_T\"]\n"
    "[reference_state]\nT = \"0 degC\"\nh = \"200 kJ/kg\"\ns = \"1 kJ/(kg K)\"\n";

std::string identity(const std::string& text, const std::string& name = "x", const std::string& build = "1") {
  return identityOf(planOf(text, name), library(), build);
}

std::string with(const std::string& old_part, const std::string& new_part) {
  std::string text = kText;
  const auto at = text.find(old_part);
  EXPECT_NE(at, std::string::npos) << old_part;
  return text.replace(at, old_part.size(), new_part);
}

TEST(Identity, IsSixtyFourHexadecimalDigits) {
  const std::string digits = identity(kText);
  EXPECT_EQ(digits.size(), 64u);
  EXPECT_EQ(digits.find_first_not_of("0123456789abcdef"), std::string::npos);
}

TEST(Identity, StaysWhereOnlyTheWritingChanges) {
  const std::string same = identity(kText);
  EXPECT_EQ(identity(kText), same);
  EXPECT_EQ(identity(with("title = \"a\"", "title = \"another\"")), same);
  EXPECT_EQ(identity(with("[collect]", "# a comment\n\n   [collect]")), same);
  EXPECT_EQ(identity(with("from = 300", "from = \"300 K\"")), same);
  EXPECT_EQ(identity(with("1e5, 2e5", "\"1 bar\", \"200 kPa\"")), same);
  EXPECT_EQ(identity(with("R-600a", "isobutane")), same);
  EXPECT_EQ(identity(with("(dh/dp)_T", "( ∂h / ∂p )_T")), same);
  EXPECT_EQ(identity(with("basis = \"mass\"\n", "")), same);  // the default
}

TEST(Identity, ChangesWithEverythingThatChangesAResult) {
  const std::vector<std::string> texts = {
      kText,
      with("equation = \"peng-robinson\"", "equation = \"soave\""),
      with("basis = \"mass\"", "basis = \"molar\""),
      with("\"compute\"", "\"refuse\""),
      with("R-600a", "R-600"),
      with("lattice = 4", "lattice = 5"),
      with("fractions_by = \"mole\"", "fractions_by = \"mass\""),
      with("from = 300", "from = 301"),
      with("count = 11", "count = 12"),
      with("\"linear\"", "\"log\""),
      with("2e5", "3e5"),
      with("\"rho\", \"h\"", "\"h\", \"rho\""),
      with("\"rho\", \"h\"", "\"rho\""),
      with("(dh/dp)_T", "(dh/dp)_s"),
      with("0 degC", "1 degC"),
      with("200 kJ/kg", "201 kJ/kg"),
      with("1 kJ/(kg K)", "2 kJ/(kg K)"),
  };
  std::set<std::string> identities;
  for (const std::string& text : texts) EXPECT_TRUE(identities.insert(identity(text)).second) << text;
  identities.insert(identity(kText, "y"));
  identities.insert(identity(kText, "x", "2"));
  EXPECT_EQ(identities.size(), texts.size() + 2);
}

}  // namespace
}  // namespace holdfast::coordinator
