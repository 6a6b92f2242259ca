// One file of data/reference: TOML to ReferenceFluid.
#pragma once

#include <string_view>

#include "thermo/fluids/library.hpp"
#include "thermo/result.hpp"

namespace holdfast::thermo {

/// Parses the text of one file. Errors name file, line and field: unknown or missing key, wrong type, a term
/// row of the wrong width, a number that is not finite. `evidence` is left empty.
Result<ReferenceFluid> parseReferenceFluid(std::string_view file, std::string_view text);

}  // namespace holdfast::thermo
