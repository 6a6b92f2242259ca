// The fluid data as it is, and what is said when it is broken.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <fstream>
#include <numeric>

#include "thermo/fluids/csv.hpp"
#include "thermo/fluids/library.hpp"

namespace holdfast::thermo {
namespace {

namespace fs = std::filesystem;
using testing::HasSubstr;

const fs::path kData = HOLDFAST_SOURCE_DIR "/thermo/fluids/data";

const FluidLibrary& library() {
  static const Result<FluidLibrary> loaded = FluidLibrary::load(kData);
  if (!loaded) throw std::runtime_error(loaded.error().message);
  return *loaded;
}

TEST(Library, HoldsTheReferenceEquationsTheCatalogueAndTheBlends) {
  EXPECT_EQ(library().references().size(), 70U);
  EXPECT_GE(library().fluids().size(), 82U);
  EXPECT_EQ(library().blends().size(), 101U);
  EXPECT_EQ(library().digest().size(), 64U);
  for (const Fluid& fluid : library().fluids()) EXPECT_TRUE(fluid.ideal.has_value()) << fluid.label();
  for (const ReferenceFluid& reference : library().references())
    EXPECT_FALSE(reference.evidence.empty()) << reference.file;
}

TEST(Library, FindsAFluidByDesignationNameCasNumberAndFile) {
  for (const char* name : {"R-290", "r-290", "propane", "74-98-6", "Propane"}) {
    const auto found = library().find(name);
    ASSERT_TRUE(found.ok()) << name;
    EXPECT_EQ((*found)->designation, "R-290");
  }
  EXPECT_EQ((*library().find("2,2-dimethylpropane"))->label(), "neopentane (2,2-dimethylpropane)");
  EXPECT_EQ((*library().find("neopentane"))->cas, "463-82-1");
  EXPECT_EQ((*library().find("R-1234ze(E)"))->safety_class, "A2L");  // ISO 817
}

TEST(Library, SuggestsTheNearestSpelling) {
  EXPECT_EQ(library().find("R-29O").error().message, "unknown fluid \"R-29O\" (did you mean \"R-290\"?)");
  EXPECT_EQ(library().find("xyzzyplugh").error().message, "unknown fluid \"xyzzyplugh\"");
}

TEST(Library, TakesTheMolarMassOfTheReferenceFileAndTheCriticalConstantsOfTheCatalogue) {
  const Fluid& r32 = **library().find("R-32");
  ASSERT_TRUE(r32.reference.has_value());
  EXPECT_EQ(r32.M, library().references()[*r32.reference].M);
  EXPECT_NEAR(r32.T_critical, 351.255, 0.01);  // Tillner-Roth, Yokozeki (1997)
  EXPECT_EQ((*library().find("R-702"))->name, "hydrogen (normal)");
  EXPECT_EQ(library().references()[*(*library().find("R-702"))->reference].file, "hydrogen");
}

TEST(Library, KeepsTheTermsWithoutDensityOfR123) {
  const Fluid& r123 = **library().find("R-123");
  const auto& equation = library().references()[*r123.reference].equation;
  EXPECT_EQ(
      std::count_if(equation.plain.begin(), equation.plain.end(), [](const auto& t) { return t.d == 0; }), 3);
}

TEST(Library, BlendsHaveMassFractionsOfOneAndKnownComponents) {
  for (const Blend& blend : library().blends()) {
    EXPECT_NEAR(std::accumulate(blend.mass_fractions.begin(), blend.mass_fractions.end(), 0.0), 1, 1e-12);
    for (const auto& component : blend.components) EXPECT_TRUE(library().find(component).ok()) << component;
  }
  const Blend* r410a = library().findBlend("r-410a");
  ASSERT_NE(r410a, nullptr);
  EXPECT_EQ(r410a->mass_fractions, (std::vector<double>{0.5, 0.5}));  // ISO 817
}

TEST(Library, InteractionsWorkInEitherOrderAndSayWhatTheyAre) {
  const Fluid& co2 = **library().find("R-744");
  const Fluid& propane = **library().find("R-290");
  EXPECT_EQ(library().interaction(co2, propane).kij, 0.124);  // Knapp et al. (1982), from memory
  EXPECT_EQ(library().interaction(propane, co2).kij, 0.124);
  EXPECT_EQ(library().interaction(propane, **library().find("water")).kind, "prediction");
}

// --------------------------------------------------------------------------------------------------- broken
// data

/// A copy of the data with one file changed; the message of loading it.
class Broken : public testing::Test {
 protected:
  Broken() : folder_(fs::temp_directory_path() / ("holdfast-broken-" + std::to_string(::getpid()))) {
    fs::remove_all(folder_);
    fs::copy(kData, folder_, fs::copy_options::recursive);
  }
  ~Broken() override { fs::remove_all(folder_); }

  std::string messageAfter(const std::string& file, const std::string& old_text,
                           const std::string& new_text) {
    std::ifstream in(folder_ / file, std::ios::binary);
    std::string text{std::istreambuf_iterator<char>(in), std::istreambuf_iterator<char>()};
    const std::size_t at = text.find(old_text);
    if (at == std::string::npos) return "the test's text is not in the file";
    text.replace(at, old_text.size(), new_text);
    std::ofstream(folder_ / file, std::ios::binary) << text;
    const auto loaded = FluidLibrary::load(folder_);
    return loaded.ok() ? "loaded" : loaded.error().message;
  }

  fs::path folder_;
};

TEST_F(Broken, TermRowOfTheWrongWidth) {
  EXPECT_EQ(messageAfter("reference/propane.toml", "[1, 0.33, 1.7313671]", "[1, 0.33]"),
            "reference/propane.toml:31: field \"plain\": a row of 3 numbers is expected");
}
TEST_F(Broken, MissingKey) {
  EXPECT_THAT(messageAfter("reference/propane.toml", "M = 0.04409562", "# M"),
              HasSubstr("field \"M\": is missing"));
}
TEST_F(Broken, UnknownKey) {
  EXPECT_THAT(messageAfter("reference/propane.toml", "formula =", "molecule = 1\nformula ="),
              HasSubstr("reference/propane.toml:4: field \"molecule\": is not known"));
}
TEST_F(Broken, NumberThatIsNotFinite) {
  EXPECT_THAT(messageAfter("reference/propane.toml", "R = 8.314472", "R = nan"),
              HasSubstr("field \"R\": the number is not finite"));
}
TEST_F(Broken, TextWhereANumberBelongs) {
  EXPECT_THAT(messageAfter("reference/propane.toml", "c0 = 4", "c0 = \"4\""),
              HasSubstr("field \"c0\": a number is expected"));
}
TEST_F(Broken, SyntaxOfTheFileItself) {
  EXPECT_THAT(messageAfter("reference/propane.toml", "cas = \"", "cas = "),
              HasSubstr("reference/propane.toml:5: "));
}
TEST_F(Broken, TableFieldThatIsNotANumber) {
  EXPECT_THAT(messageAfter("catalogue.csv", "369.89,4251200", "369.89,high"),
              HasSubstr("catalogue.csv:5: field \"p_c_Pa\": \"high\" is not a finite number"));
}
TEST_F(Broken, TableRowOfAnotherWidth) {
  EXPECT_THAT(messageAfter("catalogue.csv", "369.89,4251200", "369.89"),
              HasSubstr("catalogue.csv:5: 18 fields, the header has 19"));
}
TEST_F(Broken, ReferenceFileThatIsNotThere) {
  EXPECT_THAT(messageAfter("catalogue.csv", ",propane,\"Lemmon", ",propan,\"Lemmon"),
              HasSubstr("field \"reference\": there is no file reference/propan.toml"));
}
TEST_F(Broken, InteractionOfAFluidThatIsNotInTheCatalogue) {
  EXPECT_THAT(messageAfter("kij.csv", "R-744,carbon dioxide,R-50", "R-7444,carbon dioxide,R-50"),
              HasSubstr("kij.csv:2: field \"designation_1\": \"R-7444\" is not in the catalogue"));
}
TEST_F(Broken, BlendWhoseFractionsDoNotSumToOne) {
  EXPECT_THAT(messageAfter("blends.csv", "R-22:0.53;", "R-22:0.43;"),
              HasSubstr("the fractions do not sum to 1"));
}
TEST_F(Broken, MissingColumn) {
  EXPECT_THAT(messageAfter("kij.csv", ",kij,", ",k12,"), HasSubstr("kij.csv:1: column \"kij\" is missing"));
}

TEST(Csv, ReadsQuotedFields) {
  const auto table = CsvTable::parse("t.csv", "a,b\r\n\"x, \"\"y\"\"\",2\n", {"a", "b"});
  ASSERT_TRUE(table.ok());
  EXPECT_EQ(table->text(0, "a"), "x, \"y\"");
  EXPECT_EQ(**table->number(0, "b"), 2);
}
TEST(Csv, SaysWhichQuoteIsOpen) {
  EXPECT_EQ(CsvTable::parse("t.csv", "a\n\"x\n", {}).error().message,
            "t.csv:2: a quoted field is not closed");
}

}  // namespace
}  // namespace holdfast::thermo
