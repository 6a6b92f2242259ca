// What the tests of the study reader share.
#pragma once

#include <gtest/gtest.h>

#include "coordinator/study/study.hpp"

namespace holdfast::coordinator {

/// The project's fluid data, loaded once.
inline const thermo::FluidLibrary& library() {
  static const auto loaded =
      thermo::FluidLibrary::load(std::string(HOLDFAST_SOURCE_DIR) + "/thermo/fluids/data");
  return loaded.value();
}

/// The plan of a study that must be good.
inline v1::Plan planOf(std::string_view text, std::string_view name = "x") {
  const StudyReading reading = readStudy(name, text, library(), StudyLimits{});
  EXPECT_TRUE(reading.plan.has_value()) << render(name, reading.diagnostics);
  return reading.plan.value_or(v1::Plan());
}

}  // namespace holdfast::coordinator
