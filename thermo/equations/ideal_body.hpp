// The ideal part for one instruction set. Energy u0/(R T) = i_u and entropy s0/R at 1 mol/m3, term by term; f
// = i_u - s0/R:
//
//   c0              cv: c0 - 1              u0/(RT): c0 - 1            s0/R: (c0 - 1) ln T
//   c T^e           cv: c T^e               u0/(RT): c T^e/(e+1)       s0/R: c T^e/e            (e = -1:
//   u0/(RT) = c ln T/T) v and x = u/T   cv: v x^2 q/(1-q)^2     u0/(RT): v x q/(1-q)       s0/R: v (x q/(1-q)
//   - ln(1-q)),   q = exp(-x)
#pragma once

#include "thermo/equations/kernel.hpp"
#include "thermo/equations/vector_math.hpp"

namespace holdfast::thermo::HOLDFAST_VARIANT {

void ideal(const IdealHeatCapacity& cp0, IdealConstants constants, Order order, int count, const Row& T,
           IdealTile& out) {
  const int lanes = paddedLanes(count);
  for (int first = 0; first < lanes; first += kWidth) {
    const V t = load(T.data() + first);
    const V inverse = 1.0 / t;
    const V log_t = log(t);
    V u = fma(inverse, constants.energy, all(cp0.c0 - 1));
    V s = fma(log_t, cp0.c0 - 1, all(constants.entropy));
    V cv = all(cp0.c0 - 1);
    V dcv{};
    for (const auto& term : cp0.power) {
      const V power = term.c * exp(term.e * log_t);
      u += term.e == -1 ? power * log_t : power * (1 / (term.e + 1));
      s += power * (1 / term.e);
      cv += power;
      dcv = fma(power, term.e, dcv);
    }
    for (const auto& term : cp0.einstein) {
      const V x = term.u * inverse;
      const V q = exp(-x);
      const V rest = 1.0 - q;
      const V n = q / rest;
      const V energy = term.v * x * n;
      const V heat = energy * x / rest;
      u += energy;
      s += energy - term.v * log(rest);
      cv += heat;
      dcv = fma(heat, fma(x, 1.0 + 2.0 * n, all(-2.0)), dcv);  // T d/dT = -x d/dx
    }
    store(out[i_f].data() + first, u - s);
    if (order >= Order::first) store(out[i_u].data() + first, u);
    if (order >= Order::second) store(out[i_cv].data() + first, cv);
    if (order >= Order::third) store(out[i_dcv].data() + first, dcv);
  }
}

}  // namespace holdfast::thermo::HOLDFAST_VARIANT
