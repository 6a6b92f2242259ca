// Surfaces written down in closed form, and columns read from them.
#pragma once

#include <gtest/gtest.h>

#include <array>
#include <cmath>
#include <string>
#include <variant>

#include "thermo/jet/columns.hpp"
#include "thermo/jet/gradients.hpp"
#include "thermo/jet/partial.hpp"

namespace holdfast::thermo {

inline constexpr double kR = 8.31446261815324;

/// A gas of van der Waals with cv0 = 3 R: alphar = -ln(1 - b rho) - a rho/(R T). a = b = 0: an ideal gas.
inline JetTile vanDerWaals(double T, double rho, double a, double b) {
  JetTile jet;
  jet.count = 1;
  jet.order = Order::second;
  jet.R = kR;
  jet.M = 0.04;
  for (Row* row : {&jet.T, &jet.rho}) row->lane.fill(0);
  jet.T.lane.fill(T);
  jet.rho.lane.fill(rho);
  const double y = b * rho;
  const double e = a * rho / (kR * T);
  const std::array<double, 6> r = {
      -std::log1p(-y) - e, y / (1 - y) - e, -e, y / ((1 - y) * (1 - y)) - e, -e, -e};
  for (std::size_t k = 0; k < r.size(); ++k) jet.residual[k].lane.fill(r[k]);
  jet.ideal[i_f].lane.fill(3 - 3 * std::log(T));
  jet.ideal[i_u].lane.fill(3);
  jet.ideal[i_cv].lane.fill(3);
  return jet;
}

/// Value of a column at a single-phase state; fails the test if it is absent.
inline double valueOf(const std::string& text, const JetTile& jet, Basis basis = Basis::molar) {
  GradientTile gradients;
  gradientsOf(jet, gradients);
  const Columns columns({std::get<ColumnExpression>(parseColumn(text))}, basis, {"R-290"});
  ColumnSource source;
  source.count = 1;
  source.overall = &gradients;
  source.phase = Phase::vapour;
  const double z = 1;
  source.z = &z;
  Columns::Out out;
  columns.evaluate(source, out);
  EXPECT_EQ(out.reason[0][0], Absence::none) << text;
  return out.value[0][0];
}

}  // namespace holdfast::thermo
