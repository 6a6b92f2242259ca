#include "thermo/jet/gradients.hpp"

#include <algorithm>
#include <cmath>

namespace holdfast::thermo {

void gradientsOf(const JetTile& jet, GradientTile& out) {
  out.count = jet.count;
  out.surface = Surface::single_phase;
  out.R = jet.R;
  out.M = jet.M;
  const IdealTile& i = jet.ideal;
  const ResidualTile& r = jet.residual;
  Gradient& T = out[Base::T];
  Gradient& p = out[Base::p];
  Gradient& v = out[Base::v];
  Gradient& rho = out[Base::rho];
  Gradient& u = out[Base::u];
  Gradient& h = out[Base::h];
  Gradient& s = out[Base::s];
  Gradient& a = out[Base::a];
  Gradient& g = out[Base::g];
  const int lanes = paddedLanes(jet.count);
  for (int k = 0; k < lanes; ++k) {
    const double t = jet.T[k];
    const double density = jet.rho[k];
    const double q = jet.R * t;
    const double volume = 1 / density;
    const double by_T = 1 + r[r10][k] - r[r11][k];           // p_lnT/(rho q)
    const double by_rho = 1 + r[r10][k] + r[r20][k];         // p_lnrho/(rho q)
    const double heat = i[i_cv][k] + r[r01][k] - r[r02][k];  // cv/R
    const double energy = i[i_u][k] + r[r01][k];
    const double entropy = energy - i[i_f][k] - std::log(density) - r[r00][k];

    T.value[k] = t;
    T.by_lnT[k] = t;
    T.by_lnrho[k] = 0;

    rho.value[k] = density;
    rho.by_lnT[k] = 0;
    rho.by_lnrho[k] = density;

    v.value[k] = volume;
    v.by_lnT[k] = 0;
    v.by_lnrho[k] = -volume;

    p.value[k] = density * q * (1 + r[r10][k]);
    p.by_lnT[k] = density * q * by_T;
    p.by_lnrho[k] = density * q * by_rho;

    s.value[k] = jet.R * entropy;
    s.by_lnT[k] = jet.R * heat;
    s.by_lnrho[k] = -jet.R * by_T;

    u.value[k] = q * energy;
    u.by_lnT[k] = q * heat;
    u.by_lnrho[k] = q * r[r11][k];

    h.value[k] = q * (1 + energy + r[r10][k]);
    h.by_lnT[k] = q * (heat + by_T);
    h.by_lnrho[k] = q * (r[r11][k] + r[r20][k]);

    a.value[k] = q * (energy - entropy);
    a.by_lnT[k] = -q * entropy;
    a.by_lnrho[k] = q * (1 + r[r10][k]);

    g.value[k] = q * (1 + energy + r[r10][k] - entropy);
    g.by_lnT[k] = q * (by_T - entropy);
    g.by_lnrho[k] = q * by_rho;
  }
}

void hullOf(const GradientTile& liquid, const GradientTile& vapour, const Row& beta, GradientTile& out) {
  out.count = liquid.count;
  out.surface = Surface::pure_two_phase;
  out.R = liquid.R;
  out.M = liquid.M;
  const auto lever = [&](Base x, int k) {
    return (1 - beta[k]) * liquid[x].value[k] + beta[k] * vapour[x].value[k];
  };
  /// cv of one saturated phase along the line, less the work of its volume change: cv - T (p_T - P)^2/p_v.
  const auto heat = [](const GradientTile& side, int k, double T, double P) {
    const double cv = side[Base::s].by_lnT[k];
    const double p_T = side[Base::p].by_lnT[k] / T;
    const double p_v = -side[Base::p].by_lnrho[k] / side[Base::v].value[k];
    return cv - T * (p_T - P) * (p_T - P) / p_v;
  };
  const int lanes = paddedLanes(liquid.count);
  for (int k = 0; k < lanes; ++k) {
    const double T = liquid[Base::T].value[k];
    const double p = vapour[Base::p].value[k];
    const double P = (vapour[Base::s].value[k] - liquid[Base::s].value[k]) /
                     (vapour[Base::v].value[k] - liquid[Base::v].value[k]);
    const double cv = (1 - beta[k]) * heat(liquid, k, T, P) + beta[k] * heat(vapour, k, T, P);
    const double v = lever(Base::v, k);
    const double s = lever(Base::s, k);
    const auto set = [&](Base x, double value, double by_T, double by_v) {
      out[x].value[k] = value;
      out[x].by_lnT[k] = T * by_T;
      out[x].by_lnrho[k] = -v * by_v;
    };
    set(Base::T, T, 1, 0);
    set(Base::p, p, P, 0);
    set(Base::v, v, 0, 1);
    set(Base::rho, 1 / v, 0, -1 / (v * v));
    set(Base::u, lever(Base::u, k), cv, T * P - p);
    set(Base::h, lever(Base::h, k), cv + v * P, T * P);
    set(Base::s, s, cv / T, P);
    set(Base::a, lever(Base::a, k), -s, -p);
    set(Base::g, vapour[Base::g].value[k], v * P - s, 0);
  }
}

}  // namespace holdfast::thermo
