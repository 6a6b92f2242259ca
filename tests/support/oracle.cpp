#include "tests/support/oracle.hpp"

#include <cmath>
#include <stdexcept>

namespace holdfast::oracle {

namespace mp = boost::multiprecision;
using thermo::Base;

Residual referenceResidual(const thermo::ReferenceEquationData& data) {
  return [data](const Series& T, const Series& rho) {
    const Series tau = Series(Real(data.scale_T)) / T;
    const Series delta = rho / Series(Real(data.scale_rho));
    const Series log_tau = log(tau);
    const Series one(1.0);
    const auto monomial = [&](double d, double t, double n) {
      return Series(Real(n)) * pow(delta, Real(d)) * exp(log_tau * Series(Real(t)));
    };
    Series sum;
    for (const auto& k : data.plain) sum = sum + monomial(k.d, k.t, k.n);
    for (const auto& k : data.damped) sum = sum + monomial(k.d, k.t, k.n) * exp(-pow(delta, Real(k.c)));
    for (const auto& k : data.double_damped)
      sum = sum + monomial(k.d, k.t, k.n) * exp(-pow(delta, Real(k.c)) - pow(tau, Real(k.m)));
    for (const auto& k : data.bell) {
      const Series x = delta - Series(k.epsilon);
      const Series y = tau - Series(k.gamma);
      sum = sum + monomial(k.d, k.t, k.n) * exp(-(Series(k.alpha) * x * x) - Series(k.beta) * y * y);
    }
    for (const auto& k : data.inverse_bell) {
      const Series x = delta - Series(k.epsilon);
      const Series y = tau - Series(k.gamma);
      sum = sum + monomial(k.d, k.t, k.n) *
                      exp(-(Series(k.alpha) * x * x) + one / (Series(k.beta) * y * y + Series(k.b)));
    }
    for (const auto& k : data.nonanalytic) {
      const Series x2 = (delta - one) * (delta - one);
      const Series theta = (one - tau) + Series(k.A) * pow(x2, Real(1) / (2 * Real(k.beta)));
      const Series distance = theta * theta + Series(k.B) * pow(x2, Real(k.a));
      const Series psi = exp(-(Series(k.C) * x2) - Series(k.D) * (tau - one) * (tau - one));
      sum = sum + Series(k.n) * pow(distance, Real(k.b)) * delta * psi;
    }
    return sum;
  };
}

namespace {

/// p = R T/(v-b) - a/(v^2 + u b v + w b^2): u = 2, w = -1 Peng-Robinson; u = 1, w = 0 Soave.
struct CubicConstants {
  int u, w;
  Real omega_a, omega_b;
};

/// From the critical conditions: with Z = Z_c and B = omega_b the cubic Z^3 + c2 Z^2 + c1 Z + c0 has a triple
/// root, so that c2 = -3 Z_c, c1 = 3 Z_c^2, c0 = -Z_c^3.
CubicConstants constantsOf(thermo::CubicFamily family) {
  const bool pr = family == thermo::CubicFamily::peng_robinson;
  const int u = pr ? 2 : 1;
  const int w = pr ? -1 : 0;
  // c2 = (u-1) B - 1;  c1 = A + (w-u) B^2 - u B;  c0 = -(A B + w B^2 + w B^3). Eliminate Z_c and A; Newton on
  // B.
  Real B = 0.08;
  for (int k = 0; k < 60; ++k) {
    const auto f = [&](const Real& b) {
      const Real Z = (1 - (u - 1) * b) / 3;
      const Real A = 3 * Z * Z - (w - u) * b * b + u * b;
      return Real(Z * Z * Z - A * b - w * b * b - w * b * b * b);
    };
    const Real step = Real("1e-25");
    const Real slope = (f(B + step) - f(B - step)) / (2 * step);
    B -= f(B) / slope;
  }
  const Real Z = (1 - (u - 1) * B) / 3;
  return {u, w, Real(3 * Z * Z - (w - u) * B * B + u * B), B};
}

}  // namespace

Residual cubicResidual(thermo::CubicFamily family, const std::vector<thermo::CubicComponent>& components,
                       const std::vector<std::vector<double>>& kij, const std::vector<double>& z) {
  const CubicConstants c = constantsOf(family);
  return [=](const Series& T, const Series& rho) {
    const Real R(8.31446261815324);
    const std::size_t n = components.size();
    std::vector<Series> root_a;
    Real b = 0;
    for (std::size_t i = 0; i < n; ++i) {
      const Real Tc(components[i].T_critical);
      const Real pc(components[i].p_critical);
      const Real om(components[i].acentric_factor);
      const Real m = family == thermo::CubicFamily::peng_robinson
                         ? Real(Real("0.37464") + Real("1.54226") * om - Real("0.26992") * om * om)
                         : Real(Real("0.480") + Real("1.574") * om - Real("0.176") * om * om);
      const Series alpha_root = Series(1.0) + Series(m) * (Series(1.0) - pow(T / Series(Tc), Real(0.5)));
      root_a.push_back(Series(Real(mp::sqrt(c.omega_a * R * R * Tc * Tc / pc))) * alpha_root);
      b += Real(z[i]) * c.omega_b * R * Tc / pc;
    }
    Series a;
    for (std::size_t i = 0; i < n; ++i)
      for (std::size_t j = 0; j < n; ++j)
        a = a + Series(Real(Real(z[i]) * Real(z[j]) * (1 - Real(kij[i][j])))) * root_a[i] * root_a[j];
    // A_res/(R T) = -ln(1 - b rho) - a/(b R T s) ln[(1 + k1 b rho)/(1 + k2 b rho)], k1,2 = (u -+ s)/2
    // reversed, s = sqrt(u^2-4w)
    const Real s = mp::sqrt(Real(c.u * c.u - 4 * c.w));
    const Real k1 = (c.u + s) / 2;
    const Real k2 = (c.u - s) / 2;
    const Series one(1.0);
    const Series y = Series(b) * rho;
    return -log(one - y) -
           a / (Series(Real(b * R * s)) * T) * (log(one + Series(k1) * y) - log(one + Series(k2) * y));
  };
}

Fluid::Fluid(Residual residual, std::vector<IdealShare> ideal, double R)
    : residual_(std::move(residual)), ideal_(std::move(ideal)), R_(R) {}

namespace {

/// f(T) = u0/(RT) - s0/R at rho = 1 mol/m3 for the cp0/R form of equation_data.hpp, constants left out.
struct IdealTerms {
  Series energy;   ///< u0/R, K
  Series entropy;  ///< s0/R at constant rho
};

IdealTerms idealTerms(const thermo::IdealHeatCapacity& cp0, const Series& T) {
  const Series one(1.0);
  const Series logT = log(T);
  IdealTerms out;
  out.energy = Series(Real(Real(cp0.c0) - 1)) * T;
  out.entropy = Series(Real(Real(cp0.c0) - 1)) * logT;
  for (const auto& k : cp0.power) {
    const Real e(k.e);
    const Series power = exp(logT * Series(e));
    out.energy = out.energy + Series(Real(k.c)) * (e == -1 ? logT : power * T / Series(Real(e + 1)));
    out.entropy = out.entropy + Series(Real(Real(k.c) / e)) * power;
  }
  for (const auto& k : cp0.einstein) {
    const Series x = Series(Real(k.u)) / T;
    const Series e = exp(-x);
    out.energy = out.energy + Series(Real(k.v)) * Series(Real(k.u)) * e / (one - e);
    out.entropy = out.entropy + Series(Real(k.v)) * (x * e / (one - e) - log(one - e));
  }
  return out;
}

}  // namespace

void Fluid::calibrate(double T, double f, double u0_over_RT) {
  energy_ = entropy_ = 0;
  Real energy = 0;
  Real entropy = 0;
  const Series t = Series::temperature(Real(T));
  for (const auto& share : ideal_) {
    const IdealTerms terms = idealTerms(share.cp0, t);
    energy += Real(share.weight) * terms.energy.value();
    entropy += Real(share.weight) * terms.entropy.value();
  }
  energy_ = Real(u0_over_RT) * Real(T) - energy;
  entropy_ = Real(u0_over_RT) - Real(f) - entropy;  // s0/R = u0/(RT) - f
}

Series Fluid::helmholtz(const Real& T0, const Real& rho0) const {
  const Series T = Series::temperature(T0);
  const Series rho = Series::density(rho0);
  Series energy(energy_);
  Series entropy(entropy_);
  for (const auto& share : ideal_) {
    const IdealTerms terms = idealTerms(share.cp0, T);
    energy = energy + Series(Real(share.weight)) * terms.energy;
    entropy = entropy + Series(Real(share.weight)) * terms.entropy;
  }
  const Series RT = Series(R_) * T;
  return Series(R_) * energy - RT * entropy + RT * (log(rho) + residual_(T, rho));
}

Fluid::Bases Fluid::bases(const Real& T0, const Real& rho0) const {
  const Series A = helmholtz(T0, rho0);
  const Series T = Series::temperature(T0);
  const Series rho = Series::density(rho0);
  const Series v = pow(rho, Real(-1));
  const Series s = -A.byT();               // dA = -s dT - p dv
  const Series p = rho * rho * A.byRho();  // dv = -drho/rho^2
  Bases out;
  const auto set = [&out](Base base, const Series& series) {
    out.of[static_cast<std::size_t>(base)] = series;
  };
  set(Base::T, T);
  set(Base::p, p);
  set(Base::v, v);
  set(Base::rho, rho);
  set(Base::u, A + T * s);
  set(Base::h, A + T * s + p * v);
  set(Base::s, s);
  set(Base::a, A);
  set(Base::g, A + p * v);
  return out;
}

Derivative partial(const Fluid::Bases& bases, Base of, Base by, Base held) {
  const Series& X = bases[of];
  const Series& Y = bases[by];
  const Series& Z = bases[held];
  const Real first = X.at(1, 0) * Z.at(0, 1);
  const Real second = X.at(0, 1) * Z.at(1, 0);
  const Real below = Y.at(1, 0) * Z.at(0, 1) - Y.at(0, 1) * Z.at(1, 0);
  return {Real((first - second) / below), Real((mp::abs(first) + mp::abs(second)) / mp::abs(below))};
}

Saturation saturation(const Fluid& fluid, const Real& T, Real rho_liquid, Real rho_vapour) {
  for (int step = 0; step < 100; ++step) {
    const auto liquid = fluid.bases(T, rho_liquid);
    const auto vapour = fluid.bases(T, rho_vapour);
    // Unknowns ln rho', ln rho''; dg = dp/rho along an isotherm.
    const Real pl = liquid[Base::p].at(0, 1) * rho_liquid;
    const Real pv = vapour[Base::p].at(0, 1) * rho_vapour;
    const Real dp = liquid[Base::p].value() - vapour[Base::p].value();
    const Real dg = liquid[Base::g].value() - vapour[Base::g].value();
    const Real a11 = pl;
    const Real a12 = -pv;
    const Real a21 = pl / rho_liquid;
    const Real a22 = -pv / rho_vapour;
    const Real det = a11 * a22 - a12 * a21;
    const Real xl = (dp * a22 - a12 * dg) / det;
    const Real xv = (a11 * dg - dp * a21) / det;
    rho_liquid *= mp::exp(-xl);
    rho_vapour *= mp::exp(-xv);
    if (mp::abs(xl) + mp::abs(xv) < Real("1e-40"))
      return {fluid.bases(T, rho_vapour)[Base::p].value(), rho_liquid, rho_vapour};
  }
  throw std::runtime_error("saturation at 50 digits did not converge");
}

}  // namespace holdfast::oracle
