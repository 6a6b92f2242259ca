// Columns as the user writes them: quantities ("rho", "x[R-32]") and partial derivatives in textbook
// notation.
//
//   partial   := "(" d quantity "/" d quantity ")" "_" held
//   d         := "d" | "∂"
//   quantity  := T | p | v | rho | u | h | s | a | g, followed by ' (liquid) or '' (vapour) only with "_sat"
//   held      := quantity | "sat"
//
// White space is allowed between tokens. Second partials and composition variables extend this grammar.
#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <variant>
#include <vector>

#include "thermo/jet/gradients.hpp"
#include "thermo/jet/quantity.hpp"
#include "thermo/result.hpp"

namespace holdfast::thermo {

/// (dX/dY)_Z
struct Partial {
  Base of, by, held;
};

/// Which side of the saturation line a quantity is read on.
enum class Side { both, liquid, vapour };  ///< both: p and T, equal on the two sides

/// (dX/dY)_sat: `by` is T or p.
struct SaturationPartial {
  Base of;
  Side side;
  Base by;
};

/// A property; `component` (index into the candidate's components, resolved later) only for x, y, z: the text
/// in the bracket.
struct QuantityColumn {
  Quantity quantity;
  std::string component;
};

/// A parsed column and the text it came from.
struct ColumnExpression {
  std::variant<QuantityColumn, Partial, SaturationPartial> what;
  std::string written_as;  ///< canonical text: no white space, `d` for ∂
};

/// Where a text is wrong: byte offset from its start (0-based) and why, with what would be right.
struct GrammarError {
  std::size_t offset = 0;
  std::string message;
};

/// Parses one quantity or partial.
std::variant<ColumnExpression, GrammarError> parseColumn(std::string_view text);

/// Column name in the store: every sign but a letter or digit becomes one '_', ' is "liq", '' is "vap", "d"
/// marks stay: (dh/dp)_T -> dh_dp_at_T ; (dp/dT)_sat -> dp_dT_at_sat ; (dh'/dT)_sat -> dh_liq_dT_at_sat ;
/// x[R-1234ze(E)] -> x_R_1234ze_E
std::string columnName(const ColumnExpression& column);

/// The store's names of a study's columns, in order. SQLite ignores case: names that would clash so get the
/// long form ("Z" becomes "compressibility"); the Error names the two columns of a clash that remains.
Result<std::vector<std::string>> columnNames(const std::vector<ColumnExpression>& columns);

/// Unit of a column (UDUNITS-2 text) and a sentence on its meaning, for the store's table `quantity`.
std::string unitOf(const ColumnExpression& column, Basis basis);
std::string meaningOf(const ColumnExpression& column);

}  // namespace holdfast::thermo
