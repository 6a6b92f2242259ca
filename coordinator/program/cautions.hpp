// What can hurt someone, said at the end of a run.
#pragma once

#include <span>
#include <string>

#include "thermo/fluids/library.hpp"

namespace holdfast::coordinator {

/// A paragraph on the flammable, toxic or high-pressure ones among the components, as the catalogue knows
/// them, that defers to local codes and licensed practice. Empty if none of its fluids has a caution.
std::string cautionsOf(std::span<const std::string> components, const thermo::FluidLibrary& library);

}  // namespace holdfast::coordinator
