// States in, columns out: thermo's front door for the rest of the house.
#pragma once

#include <memory>
#include <vector>

#include "thermo/equilibrium/candidate.hpp"
#include "thermo/equilibrium/states.hpp"
#include "thermo/jet/columns.hpp"
#include "thermo/state.hpp"

namespace holdfast::thermo {

/// Columns of a tile of points.
struct ColumnTile {
  int count = 0;
  std::array<Phase, kTile> phase;
  std::array<Outcome, kTile> outcome;
  std::array<Reason, kTile> reason;
  Columns::Out columns;  ///< value finite where reason is Absence::none; every column of a lane without
                         ///< numbers is left out
};

/// Evaluates the same columns at states of one candidate. Immutable: safe from many threads.
class Evaluator {
 public:
  Evaluator(std::shared_ptr<const Candidate> candidate, std::vector<ColumnExpression> columns, Basis basis,
            BeyondValidity beyond);

  const Candidate& candidate() const { return *candidate_; }

  /// `z`: mole fractions, one composition for the tile (any composition for a pure candidate).
  void evaluate(const InputTile& input, const Composition& z, ColumnTile& out) const;

 private:
  std::shared_ptr<const Candidate> candidate_;
  Columns columns_;
  BeyondValidity beyond_;
};

}  // namespace holdfast::thermo
