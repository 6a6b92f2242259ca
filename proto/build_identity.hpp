// Which build this is: two programs work together only if they would compute the same bits.
#pragma once

#include <string_view>

namespace holdfast {

/// "0.1.0+1f3a9c02b7de": version, and twelve hexadecimal digits over the sources of thermo/, proto/ and
/// worker/, the compiler and the build type.
std::string_view buildIdentity();

}  // namespace holdfast
