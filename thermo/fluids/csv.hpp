// Comma-separated tables (RFC 4180) with a header line, as the fluid data uses them. Fields are found by
// column name, never by position.
#pragma once

#include <map>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "thermo/result.hpp"

namespace holdfast::thermo {

/// One table in memory. Immutable after read.
class CsvTable {
 public:
  /// Parses text. `file` is only for messages. Errors name file and line: unterminated quote, a row of
  /// another width than the header, a column that `required` asks for and the header does not have.
  static Result<CsvTable> parse(std::string_view file, std::string_view text,
                                const std::vector<std::string>& required);

  std::size_t rows() const { return rows_.size(); }
  /// Text of a field; the column must be one of the header.
  const std::string& text(std::size_t row, const std::string& column) const;
  /// A number: nullopt if the field is empty; the Error names file, line and field if it is not a finite
  /// number.
  Result<std::optional<double>> number(std::size_t row, const std::string& column) const;
  /// The same where a number must stand.
  Result<double> requiredNumber(std::size_t row, const std::string& column) const;
  /// "catalogue.csv:12: field "M_kg_per_mol": " + what
  Error fault(std::size_t row, const std::string& column, const std::string& what) const;

 private:
  struct Line {
    int number = 0;
    std::vector<std::string> fields;
  };
  std::string file_;
  std::map<std::string, std::size_t> columns_;
  std::vector<Line> rows_;
};

/// The finite number that the whole text is, or nullopt.
std::optional<double> wholeNumber(std::string_view text);

}  // namespace holdfast::thermo
