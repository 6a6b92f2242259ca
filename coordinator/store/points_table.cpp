#include "coordinator/store/points_table.hpp"

#include <algorithm>
#include <optional>
#include <string>
#include <utility>
#include <variant>

#include "coordinator/store/record_image.hpp"
#include "coordinator/store/sqlite.hpp"
#include "thermo/jet/partial.hpp"

namespace holdfast::coordinator {
namespace {

Result<thermo::ColumnExpression> parse(const std::string& text) {
  auto parsed = thermo::parseColumn(text);
  if (auto* error = std::get_if<thermo::GrammarError>(&parsed))
    return Error{"column \"" + text + "\": " + error->message};
  return std::get<thermo::ColumnExpression>(std::move(parsed));
}

}  // namespace

Result<PointsTable> PointsTable::of(const v1::Plan& plan) {
  const thermo::Basis basis = plan.basis() == v1::BASIS_MOLAR ? thermo::Basis::molar : thermo::Basis::mass;
  PointsTable table;
  table.study_ = plan.name();
  table.name_ = "points_" + plan.name();

  std::vector<thermo::ColumnExpression> expressions;
  const auto take = [&](const std::string& text, StoredColumn::Source source, int index) -> Status {
    auto expression = parse(text);
    if (!expression) return expression.error();
    const bool again = std::ranges::any_of(expressions, [&](const thermo::ColumnExpression& earlier) {
      return earlier.written_as == expression->written_as;
    });
    if (again) return success();
    StoredColumn column;
    column.written_as = expression->written_as;
    column.meaning = thermo::meaningOf(*expression);
    column.unit = thermo::unitOf(*expression, basis);
    column.source = source;
    column.index = index;
    table.stored_.push_back(std::move(column));
    expressions.push_back(std::move(*expression));
    return success();
  };
  for (int i = 0; i < plan.axes_size(); ++i)
    if (Status taken = take(plan.axes(i).quantity(), StoredColumn::Source::axis, i); !taken)
      return taken.error();
  for (int i = 0; i < plan.columns_size(); ++i)
    if (Status taken = take(plan.columns(i), StoredColumn::Source::collected, i); !taken)
      return taken.error();
  if (expressions.size() > RecordImage::kMostReals)
    return Error{"a study stores at most " + std::to_string(RecordImage::kMostReals) + " columns"};

  auto names = thermo::columnNames(expressions);
  if (!names) return names.error();
  for (std::size_t i = 0; i < names->size(); ++i) table.stored_[i].name = (*names)[i];
  table.derive(basis == thermo::Basis::molar);
  return table;
}

/// What is exact and costs nothing: v and rho from each other, and the definitions h = u + p v, a = u - T s,
/// g = h - T s.
void PointsTable::derive(bool molar) {
  const auto stored = [&](std::string_view symbol) -> std::optional<std::string> {
    const auto found = std::ranges::find(stored_, symbol, &StoredColumn::written_as);
    if (found == stored_.end()) return std::nullopt;
    return "points." + named(found->name);
  };
  const auto add = [&](const char* symbol, const std::string& formula, const std::string& expression) {
    const auto parsed = std::get<thermo::ColumnExpression>(thermo::parseColumn(symbol));
    DerivedColumn column;
    column.name = symbol;
    column.written_as = formula;
    column.meaning = thermo::meaningOf(parsed);
    column.unit = thermo::unitOf(parsed, molar ? thermo::Basis::molar : thermo::Basis::mass);
    column.expression = expression;
    derived_.push_back(std::move(column));
  };
  const auto T = stored("T"), p = stored("p"), s = stored("s"), rho = stored("rho");
  auto v = stored("v"), u = stored("u"), h = stored("h");
  if (v && !rho) add("rho", "1/v", "1.0 / " + *v);
  if (!v && rho) {
    v = "(1.0 / " + *rho + ")";
    add("v", "1/rho", *v);
  }
  if (!h && u && p && v) {
    h = "(" + *u + " + " + *p + " * " + *v + ")";
    add("h", "u + p v", *h);
  } else if (!u && h && p && v) {
    u = "(" + *h + " - " + *p + " * " + *v + ")";
    add("u", "h - p v", *u);
  }
  if (!stored("a") && u && T && s) add("a", "u - T s", *u + " - " + *T + " * " + *s);
  if (!stored("g") && h && T && s) add("g", "h - T s", *h + " - " + *T + " * " + *s);
}

std::string PointsTable::createTable() const {
  std::string sql = "CREATE TABLE " + named(name_) +
                    " (\n"
                    "  point INTEGER PRIMARY KEY,     -- counted from 0; last axis fastest\n"
                    "  composition INTEGER NOT NULL,  -- composition.id\n"
                    "  phase INTEGER,                 -- phase.code; NULL: not known\n"
                    "  outcome INTEGER NOT NULL";
  std::string comment = "outcome.code";
  for (const StoredColumn& column : stored_) {
    sql += ",  -- " + comment + "\n  " + named(column.name) + " REAL" +
           (column.source == StoredColumn::Source::axis ? " NOT NULL" : "");
    comment = column.written_as + " in " + column.unit;
  }
  return sql + "  -- " + comment + "\n) STRICT";
}

std::string PointsTable::createImageTable() const {
  std::string sql =
      "CREATE TABLE rows(point INTEGER PRIMARY KEY,composition INTEGER NOT NULL,phase INTEGER,outcome "
      "INTEGER "
      "NOT NULL";
  for (std::size_t i = 0; i < stored_.size(); ++i)
    sql += ",c" + std::to_string(i) + " REAL" +
           (stored_[i].source == StoredColumn::Source::axis ? " NOT NULL" : "");
  return sql + ") STRICT";
}

/// Labels are looked up row by row, not joined: what a question does not use is not looked up, and no
/// question makes SQLite put the points into an inner loop, where it would build an index of them all.
std::string PointsTable::createView(std::int64_t study) const {
  const std::string of_composition = " FROM composition WHERE study = " + std::to_string(study) +
                                     " AND composition.id = points.composition)";
  std::string sql =
      "CREATE VIEW " + named(study_) +
      " AS SELECT\n"
      "  point,\n"
      "  (SELECT label FROM composition JOIN candidate ON candidate.study = composition.study AND "
      "candidate.id = composition.candidate WHERE composition.study = " +
      std::to_string(study) +
      " AND composition.id = points.composition) AS candidate,\n"
      "  composition,\n"
      "  (SELECT name FROM phase WHERE code = points.phase) AS phase,\n"
      "  (SELECT name FROM outcome WHERE code = points.outcome) AS outcome,\n";
  if (std::ranges::find(stored_, "M", &StoredColumn::written_as) == stored_.end())
    sql += "  (SELECT M" + of_composition + " AS M,\n";
  sql += "  (SELECT gwp100" + of_composition + " AS gwp100";
  for (const StoredColumn& column : stored_) sql += ",\n  points." + named(column.name);
  for (const DerivedColumn& column : derived_)
    sql += ",\n  " + column.expression + " AS " + named(column.name);
  return sql + "\nFROM " + named(name_) + " AS points";
}

}  // namespace holdfast::coordinator
