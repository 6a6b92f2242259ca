// Columns computed from gradients: the partial algebra. (dX/dY)_Z = J(X,Z)/J(Y,Z), J(X,Z) = X_lnT Z_lnrho -
// X_lnrho Z_lnT.
#pragma once

#include <array>
#include <string_view>
#include <vector>

#include "thermo/jet/gradients.hpp"
#include "thermo/jet/partial.hpp"
#include "thermo/state.hpp"

namespace holdfast::thermo {

/// Why a column has no value at states of some kind. Codes travel in messages; the sentence goes to the
/// store's `absence`.
enum class Absence : std::uint8_t {
  none = 0,
  dependent_variables,    ///< the variables depend on each other there (v and rho; T, p and g in two phases):
                          ///< no such derivative
  needs_saturated_state,  ///< along the saturation line, or beta, and the state is of one phase and not on
                          ///< that line
  phase_not_there,        ///< x of a vapour, y of a liquid
  no_such_component,      ///< x, y of a component that this candidate does not have
  singular,               ///< the denominator vanishes at the state (critical point)
};
std::string_view sentenceOf(Absence absence);

/// Are both saturated phases of the states known?
enum class Saturated { no, yes };

/// What the columns of a tile are read from.
struct ColumnSource {
  int count = 0;
  const GradientTile* overall = nullptr;  ///< the single-phase jet's or the hull's gradients
  const GradientTile* liquid =
      nullptr;  ///< saturated liquid and vapour; null where the states are not saturated
  const GradientTile* vapour = nullptr;
  const Row* beta = nullptr;  ///< null where the states are not saturated
  Phase phase = Phase::none;  ///< all lanes of a call share phase and surface
  const double* z = nullptr;  ///< mole fractions of the candidate's components
};

/// Compiled columns of a study: which gradients, which Jacobians (two a partial), which scale for the
/// basis.
class Columns {
 public:
  /// Component texts of x[..], y[..], z[..] are looked up in `designations`; an unknown one: such a column is
  /// absent (no_such_component for x and y, and 0 for z) — a study may name a component that only some
  /// candidates have.
  Columns(std::vector<ColumnExpression> expressions, Basis basis, std::vector<std::string> designations);

  int count() const;

  /// Why column c is absent for every state of this surface, or none. Decided by rank, never by a tolerance.
  Absence absence(int column, Surface surface, Saturated saturated, Phase phase) const;

  /// Writes column c of lane k to out[c][k] for all columns and lanes; absent or singular ones are left out
  /// and reported: reasons[c][k] is Absence::none where out[c][k] is a finite number.
  struct Out {
    std::vector<Row> value;                          ///< [column]
    std::vector<std::array<Absence, kTile>> reason;  ///< [column][lane]
  };
  void evaluate(const ColumnSource& source, Out& out) const;

 private:
  struct Column {
    decltype(ColumnExpression::what) what;
    int component =
        -1;  ///< of x, y, z: index into the candidate's components; -1 if it has no such component
  };
  std::vector<Column> columns_;
  Basis basis_;
};

}  // namespace holdfast::thermo
