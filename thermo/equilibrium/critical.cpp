#include "thermo/equilibrium/critical.hpp"

#include <algorithm>
#include <cmath>
#include <optional>
#include <sstream>

namespace holdfast::thermo {
namespace {

// p_rho = R T q with q = 1 + r10 + r20, and rho p_rhorho = R T (r20 + r30). Along an isotherm q has its
// minimum where r20 + r30 = 0; the critical isotherm is the one whose minimum is zero. The slope of that
// minimum along T is the partial derivative of q at it (envelope theorem), an exact third-order row, so that
// only the search for the minimum, 63-section over the lanes of a tile, goes without a slope.

struct Minimum {
  double rho, q, slope;  ///< mol/m3; q; T dq/dT
};

std::optional<Minimum> smallestSlope(const Equation& equation, double T, double from, double up_to) {
  Row temperature;
  Row density;
  ResidualTile jet;
  temperature.lane.fill(T);
  const auto q = [&](int k) { return 1 + jet[r10][k] + jet[r20][k]; };
  for (int pass = 0; pass < 12; ++pass) {
    for (int k = 0; k < kTile; ++k) density[k] = from + (up_to - from) * k / (kTile - 1);
    equation.residual(Order::third, {kTile, &temperature, &density, nullptr}, jet);
    int lowest = -1;
    for (int k = 0; k + 1 < kTile; ++k) {
      const double here = jet[r20][k] + jet[r30][k];
      const double next = jet[r20][k + 1] + jet[r30][k + 1];
      if (here <= 0 && next > 0 && (lowest < 0 || q(k) < q(lowest))) lowest = k;
    }
    if (lowest < 0) return std::nullopt;
    from = density[lowest];
    up_to = density[lowest + 1];
    if (up_to - from <= 1e-13 * up_to || pass == 11)
      return Minimum{from, q(lowest), -(jet[r11][lowest] + jet[r21][lowest])};
  }
  return std::nullopt;
}

Error notFound(CriticalPoint start, double T, double rho, double q) {
  std::ostringstream text;
  text << "no critical point of the equation near " << start.T << " K, " << start.rho << " mol/m3: came to "
       << T << " K, " << rho << " mol/m3, dp/drho = " << q << " R T";
  return Error{text.str()};
}

}  // namespace

Result<CriticalPoint> findCriticalPoint(const Equation& pure, CriticalPoint start) {
  double T = start.T;
  double width = 0.4;
  double centre = start.rho;
  double last = 0;
  for (int iteration = 0; iteration < 60; ++iteration) {
    auto minimum = smallestSlope(pure, T, centre * (1 - width), centre * (1 + width));
    if (!minimum && width < 0.4) {
      width = 0.4;
      centre = start.rho;
      minimum = smallestSlope(pure, T, centre * (1 - width), centre * (1 + width));
    }
    if (!minimum || !(minimum->slope > 0)) return notFound(start, T, centre, last);
    centre = minimum->rho;
    last = minimum->q;
    const double step = std::clamp(-minimum->q / minimum->slope, -0.01, 0.01);
    // q is of order one away from the critical point and its rows carry a few 1e-15.
    if (std::abs(step) < 1e-14 || (iteration > 8 && std::abs(minimum->q) < 1e-13)) {
      Row temperature;
      Row density;
      ResidualTile jet;
      temperature.lane.fill(T);
      density.lane.fill(centre);
      pure.residual(Order::first, {1, &temperature, &density, nullptr}, jet);
      return CriticalPoint{T, centre * pure.gasConstant(0) * T * (1 + jet[r10][0]), centre};
    }
    T *= 1 + step;
    if (std::abs(T / start.T - 1) > 0.08) break;
    width = std::clamp(20 * std::sqrt(std::abs(step)), 1e-3, 0.4);
  }
  return notFound(start, T, centre, last);
}

}  // namespace holdfast::thermo
