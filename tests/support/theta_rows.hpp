// Rows of a jet from a 50-digit series: the logarithmic operators applied to plain derivatives.
#pragma once

#include <array>

#include "tests/support/series.hpp"
#include "thermo/jet/jet.hpp"

namespace holdfast::oracle {

/// theta_d^i theta_t^j of a series around (T, rho) from its plain derivatives.
inline std::array<Real, thermo::kResidualRows> thetaRows(const Series& s, const Real& T, const Real& rho) {
  // theta_d f = rho f_rho as a series again; theta_t f = -T f_T
  const auto d = [&](const Series& f) { return Series::density(rho) * f.byRho(); };
  const auto t = [&](const Series& f) { return -(Series::temperature(T) * f.byT()); };
  std::array<Real, thermo::kResidualRows> out;
  out[thermo::r00] = s.value();
  out[thermo::r10] = d(s).value();
  out[thermo::r01] = t(s).value();
  out[thermo::r20] = d(d(s)).value();
  out[thermo::r11] = t(d(s)).value();
  out[thermo::r02] = t(t(s)).value();
  out[thermo::r30] = d(d(d(s))).value();
  out[thermo::r21] = t(d(d(s))).value();
  out[thermo::r12] = t(t(d(s))).value();
  out[thermo::r03] = t(t(t(s))).value();
  return out;
}

}  // namespace holdfast::oracle
