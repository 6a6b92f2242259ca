// A study file read and checked: text in, plan or diagnostics out.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "holdfast.pb.h"
#include "thermo/fluids/library.hpp"

namespace holdfast::coordinator {

/// A mistake in a study, as a compiler reports it. Line and column count from 1; 0 if the file as a whole is
/// meant.
struct Diagnostic {
  int line = 0;
  int column = 0;
  std::string message;
};

/// "studies/x.toml:14:9: error: unknown fluid ..." one a line.
std::string render(std::string_view file, const std::vector<Diagnostic>& diagnostics);

struct StudyReading {
  std::optional<v1::Plan> plan;         ///< there if and only if there are no diagnostics
  std::vector<Diagnostic> diagnostics;  ///< every mistake found, in file order
};

struct StudyLimits {
  std::uint64_t points = 1'000'000'000;
};

/// Reads study text. `name` is the file's stem. Nothing is opened: no path leads from a study to the file
/// system.
StudyReading readStudy(std::string_view name, std::string_view text, const thermo::FluidLibrary& library,
                       const StudyLimits& limits);

/// Identity of a study: SHA-256 over the canonical plan (title left out), the fluid data used and the build;
/// 64 hexadecimal digits.
std::string identityOf(const v1::Plan& plan, const thermo::FluidLibrary& library, std::string_view build);

}  // namespace holdfast::coordinator
