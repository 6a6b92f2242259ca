// What the tests of malformed studies share. A mark (@) stands in each text where a message must point; the
// tests take the marks out and count lines and characters themselves.
#pragma once

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <string>
#include <vector>

#include "tests/coordinator/study/study_support.hpp"

namespace holdfast::coordinator {

struct Malformed {
  const char* what;
  std::string text;                   ///< with a mark at each place that is reported
  std::vector<const char*> messages;  ///< parts of the messages, in file order
};

/// Names the parameter in the test's output.
inline void PrintTo(const Malformed& malformed, std::ostream* out) {
  *out << malformed.what;
}

/// Pieces of a good study.
inline const std::string kFluid = "[[candidate]]\nfluid = \"R-290\"\n";
inline const std::string kT = "[[axis]]\nquantity = \"T\"\nfrom = 300\nto = \"80 degC\"\ncount = 3\n";
inline const std::string kP = "[[axis]]\nquantity = \"p\"\nvalues = [\"1 bar\", 2e5]\n";
inline const std::string kBeta = "[[axis]]\nquantity = \"beta\"\nvalues = [0, 1]\n";
inline const std::string kCollect = "[collect]\nquantities = [\"rho\"]\n";
inline const std::string kRest = kT + kP + kCollect;

inline Diagnostic place(int line, int column) {
  return {line, column, ""};
}

/// Takes the marks out of a text and tells where they stood.
inline std::vector<Diagnostic> takeMarks(std::string& text) {
  std::vector<Diagnostic> marks;
  std::string clean;
  int line = 1, column = 1;
  for (const char sign : text) {
    if (sign == '@') {
      marks.push_back(place(line, column));
      continue;
    }
    clean += sign;
    if (sign == '\n') {
      ++line;
      column = 1;
    } else if ((static_cast<unsigned char>(sign) & 0xC0U) != 0x80U) {
      ++column;
    }
  }
  text = clean;
  return marks;
}

class MalformedStudy : public ::testing::TestWithParam<Malformed> {};

/// Reads it and compares every message and its place.
inline void expectReportedInPlace(const Malformed& malformed) {
  std::string text = malformed.text;
  const auto marks = takeMarks(text);
  const StudyReading reading = readStudy("study_of_tests", text, library(), StudyLimits{});
  EXPECT_FALSE(reading.plan.has_value());
  const std::string shown = render("x.toml", reading.diagnostics);
  ASSERT_EQ(reading.diagnostics.size(), malformed.messages.size()) << shown;
  ASSERT_EQ(marks.size(), malformed.messages.size());
  for (std::size_t i = 0; i < marks.size(); ++i) {
    EXPECT_EQ(reading.diagnostics[i].line, marks[i].line) << shown;
    EXPECT_EQ(reading.diagnostics[i].column, marks[i].column) << shown;
    EXPECT_THAT(reading.diagnostics[i].message, ::testing::HasSubstr(malformed.messages[i]));
  }
}

/// Names of the parameters in the test's output.
inline std::string indexOf(const ::testing::TestParamInfo<Malformed>& info) {
  return std::to_string(info.index);
}

}  // namespace holdfast::coordinator
