// The comma-separated tables of the fluid data, read against each other.
#pragma once

#include <map>
#include <string>
#include <vector>

#include "thermo/fluids/csv.hpp"
#include "thermo/fluids/library.hpp"

namespace holdfast::thermo {

/// catalogue.csv and cp0.csv joined with the reference files: one Fluid a row, then one for each reference
/// file that no row names.
Result<std::vector<Fluid>> joinFluids(const CsvTable& catalogue, const CsvTable& cp0,
                                      const std::vector<ReferenceFluid>& references);
/// Columns that joinFluids reads.
const std::vector<std::string>& catalogueColumns();
const std::vector<std::string>& cp0Columns();

/// kij.csv: keyed by the two labels in ascending order. Every fluid must be one of `fluids`.
using Interactions = std::map<std::pair<std::string, std::string>, BinaryInteraction>;
Result<Interactions> readInteractions(const CsvTable& table, const std::vector<Fluid>& fluids);
const std::vector<std::string>& interactionColumns();

/// blends.csv. Components must be designations of `fluids`; mass fractions must sum to 1 within 1e-6 and are
/// then normalised.
Result<std::vector<Blend>> readBlends(const CsvTable& table, const std::vector<Fluid>& fluids);
const std::vector<std::string>& blendColumns();

}  // namespace holdfast::thermo
