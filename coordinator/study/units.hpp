// Quantities as people write them: "-20 degC", "5 bar", "1 kJ/(kg K)". The units are those of UDUNITS-2.
#pragma once

#include <string_view>

#include "thermo/result.hpp"

namespace holdfast::coordinator {

/// The SI value of `text`: a number, and after it, with or without a blank, a unit of UDUNITS-2 that converts
/// to `si_unit` ("K", "Pa", "J/(kg K)", "1"). A bare number is SI already. Offsets are applied (0 degC is
/// 273.15 K): temperatures, not temperature differences. The Error quotes the text and says what would be
/// right; where the dimension is wrong it names both units. Safe from many threads.
Result<double> parseQuantity(std::string_view text, std::string_view si_unit);

}  // namespace holdfast::coordinator
