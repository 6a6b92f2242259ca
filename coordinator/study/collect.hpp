// What a study collects: quantities and partial derivatives, as columns of the store.
#pragma once

#include <array>
#include <string>
#include <vector>

#include "coordinator/study/axes.hpp"
#include "coordinator/study/section.hpp"
#include "thermo/fluids/library.hpp"

namespace holdfast::coordinator {

/// Most columns of a study.
inline constexpr std::size_t kMostColumns = 256;

inline constexpr std::array<std::string_view, 2> kCollectKeys = {"quantities", "partials"};

/// Columns in canonical text, quantities first. Grammar errors point at the character. `components` are the
/// labels of all candidates' components: x[...], y[...] and z[...] must name one; empty: not checked.
std::vector<std::string> readColumns(const Section& collect, const Axes& axes,
                                     const std::vector<std::string>& components,
                                     const thermo::FluidLibrary& library, Findings& findings);

}  // namespace holdfast::coordinator
