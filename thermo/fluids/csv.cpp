#include "thermo/fluids/csv.hpp"

#include <cassert>
#include <charconv>
#include <cmath>

namespace holdfast::thermo {

std::optional<double> wholeNumber(std::string_view text) {
  if (!text.empty() && text.front() == '+') text.remove_prefix(1);
  double value = 0;
  const auto [end, fault] = std::from_chars(text.data(), text.data() + text.size(), value);
  if (fault != std::errc() || end != text.data() + text.size() || !std::isfinite(value)) return std::nullopt;
  return value;
}

Result<CsvTable> CsvTable::parse(std::string_view file, std::string_view text,
                                 const std::vector<std::string>& required) {
  CsvTable table;
  table.file_ = file;
  std::vector<Line> lines;
  Line line{1, {}};
  std::string field;
  int number = 1;
  bool quoted = false;
  const auto at = [&](int where) { return std::string(file) + ":" + std::to_string(where) + ": "; };
  const auto endLine = [&] {
    line.fields.push_back(std::move(field));
    field.clear();
    if (line.fields.size() > 1 || !line.fields[0].empty()) lines.push_back(std::move(line));
    line = Line{number, {}};
  };
  for (std::size_t i = 0; i < text.size(); ++i) {
    const char c = text[i];
    if (c == '\n') ++number;
    if (quoted) {
      if (c == '"' && i + 1 < text.size() && text[i + 1] == '"') {
        field += '"';
        ++i;
      } else if (c == '"') {
        quoted = false;
      } else {
        field += c;
      }
    } else if (c == '"' && field.empty()) {
      quoted = true;
    } else if (c == ',') {
      line.fields.push_back(std::move(field));
      field.clear();
    } else if (c == '\n') {
      endLine();
    } else if (c != '\r') {
      field += c;
    }
  }
  if (quoted) return Error{at(line.number) + "a quoted field is not closed"};
  if (!field.empty() || !line.fields.empty()) endLine();
  if (lines.empty()) return Error{at(1) + "the table is empty"};

  for (std::size_t c = 0; c < lines[0].fields.size(); ++c) table.columns_[lines[0].fields[c]] = c;
  for (const auto& column : required)
    if (!table.columns_.contains(column)) return Error{at(1) + "column \"" + column + "\" is missing"};
  for (std::size_t r = 1; r < lines.size(); ++r)
    if (lines[r].fields.size() != lines[0].fields.size())
      return Error{at(lines[r].number) + std::to_string(lines[r].fields.size()) + " fields, the header has " +
                   std::to_string(lines[0].fields.size())};
  lines.erase(lines.begin());
  table.rows_ = std::move(lines);
  return table;
}

const std::string& CsvTable::text(std::size_t row, const std::string& column) const {
  const auto found = columns_.find(column);
  assert(found != columns_.end());
  return rows_[row].fields[found->second];
}

Result<std::optional<double>> CsvTable::number(std::size_t row, const std::string& column) const {
  const std::string& field = text(row, column);
  if (field.empty()) return std::optional<double>();
  const auto value = wholeNumber(field);
  if (!value) return fault(row, column, "\"" + field + "\" is not a finite number");
  return value;
}

Result<double> CsvTable::requiredNumber(std::size_t row, const std::string& column) const {
  const auto value = number(row, column);
  if (!value) return value.error();
  if (!value->has_value()) return fault(row, column, "a number is missing");
  return **value;
}

Error CsvTable::fault(std::size_t row, const std::string& column, const std::string& what) const {
  return Error{file_ + ":" + std::to_string(rows_[row].number) + ": field \"" + column + "\": " + what};
}

}  // namespace holdfast::thermo
