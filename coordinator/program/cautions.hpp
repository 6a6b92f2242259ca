// What can hurt someone, said at the end of a run.
#pragma once

#include <string>

#include "holdfast.pb.h"
#include "thermo/fluids/library.hpp"

namespace holdfast::coordinator {

/// A paragraph on the plan's flammable, toxic or high-pressure fluids, as the catalogue knows them, that
/// defers to local codes and licensed practice. Empty if none of its fluids has a caution.
std::string cautionsOf(const v1::Plan& plan, const thermo::FluidLibrary& library);

}  // namespace holdfast::coordinator
