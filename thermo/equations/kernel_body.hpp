// The kernel's one source. Letters as in jet.hpp: every row is theta_d^i theta_t^j alphar.
//
// - Plain and damped terms: sums over tau^t, then over delta^d, then the shared envelope E = exp(-delta^c) by
//   the product rule, with theta_d E = e1 E, e1 = -c delta^c.
// - Separable terms: F = n delta^d tau^t exp(g(delta) + h(tau)); rows are F D_i T_j, D_1 = d + theta_d g, ...
// - Nonanalytic terms: F = exp(L), rows by the polynomials of Bell (1934) in the derivatives of
//   L = b ln Delta + ln delta + ln psi. Within 1e-10 of delta = 1, delta - 1 is taken as 1e-10, so that rows
//   stay finite. At the critical point itself the published form has none: its second derivative in tau
//   diverges (cv of water and carbon dioxide), and what stands here is a large number set by that 1e-10.
//
// Terms whose exponent lies below -200 count as zero, so that a whole vector of them may be left out without
// a lane noticing.
#pragma once

#include <array>
#include <vector>

#include "thermo/equations/kernel.hpp"
#include "thermo/equations/vector_math.hpp"

namespace holdfast::thermo::HOLDFAST_VARIANT {

namespace {

constexpr double kNegligible = -200;

/// Rows of order N, with theta derivatives up to it: index as ResidualRow.
template <int N>
struct Rows {
  static constexpr int kCount = (N + 1) * (N + 2) / 2;
  std::array<V, kCount> r{};
  V& operator[](int i) { return r[static_cast<std::size_t>(i)]; }
  V operator[](int i) const { return r[static_cast<std::size_t>(i)]; }
};

/// sum[i,j] += weight D_i T_j, D_0 = T_0 = 1.
template <int N>
void addSeparable(Rows<N>& sum, V weight, const std::array<V, 4>& D, const std::array<V, 4>& T) {
  sum[r00] += weight;
  if constexpr (N >= 1) {
    sum[r10] = fma(weight, D[1], sum[r10]);
    sum[r01] = fma(weight, T[1], sum[r01]);
  }
  if constexpr (N >= 2) {
    sum[r20] = fma(weight, D[2], sum[r20]);
    sum[r11] = fma(weight * D[1], T[1], sum[r11]);
    sum[r02] = fma(weight, T[2], sum[r02]);
  }
  if constexpr (N >= 3) {
    sum[r30] = fma(weight, D[3], sum[r30]);
    sum[r21] = fma(weight * D[2], T[1], sum[r21]);
    sum[r12] = fma(weight * D[1], T[2], sum[r12]);
    sum[r03] = fma(weight, T[3], sum[r03]);
  }
}

/// From the theta derivatives l1, l2, l3 of ln F to those of F, divided by F.
inline std::array<V, 4> ofLogarithm(V l1, V l2, V l3) {
  return {all(1.0), l1, fma(l1, l1, l2), fma(l1, fma(l1, l1, 3.0 * l2), l3)};
}

template <int N>
void addGroups(const EquationPlan& plan, const V* tau, const V* delta, Rows<N>& sum) {
  const EquationPlan::DeltaPower* power = plan.powers.data();
  const EquationPlan::TauTerm* term = plan.terms.data();
  for (const EquationPlan::Group& group : plan.groups) {
    Rows<N> m;
    for (const auto* last = power + group.powers; power != last; ++power) {
      std::array<V, N + 1> s{};  // sum of n t^j tau^t
      for (const auto* end = term + power->terms; term != end; ++term) {
        const V base = tau[term->power];
        for (int j = 0; j <= N; ++j)
          s[static_cast<std::size_t>(j)] = fma(base, term->factor[j], s[static_cast<std::size_t>(j)]);
      }
      for (int j = 0; j <= N; ++j) s[static_cast<std::size_t>(j)] *= delta[power->power];
      m[r00] += s[0];
      if constexpr (N >= 1) {
        m[r10] = fma(s[0], power->factor[1], m[r10]);
        m[r01] += s[1];
      }
      if constexpr (N >= 2) {
        m[r20] = fma(s[0], power->factor[2], m[r20]);
        m[r11] = fma(s[1], power->factor[1], m[r11]);
        m[r02] += s[2];
      }
      if constexpr (N >= 3) {
        m[r30] = fma(s[0], power->factor[3], m[r30]);
        m[r21] = fma(s[1], power->factor[2], m[r21]);
        m[r12] = fma(s[2], power->factor[1], m[r12]);
        m[r03] += s[3];
      }
    }
    if (group.c == 0) {
      for (int i = 0; i < Rows<N>::kCount; ++i) sum[i] += m[i];
      continue;
    }
    const V E = exp(-delta[group.envelope]);
    const V e1 = -group.c * delta[group.envelope];
    sum[r00] = fma(E, m[r00], sum[r00]);
    if constexpr (N >= 1) {
      sum[r10] = fma(E, fma(e1, m[r00], m[r10]), sum[r10]);
      sum[r01] = fma(E, m[r01], sum[r01]);
    }
    if constexpr (N >= 2) {
      const V e2 = e1 * (e1 + group.c);
      sum[r20] = fma(E, fma(e2, m[r00], fma(2.0 * e1, m[r10], m[r20])), sum[r20]);
      sum[r11] = fma(E, fma(e1, m[r01], m[r11]), sum[r11]);
      sum[r02] = fma(E, m[r02], sum[r02]);
      if constexpr (N >= 3) {
        const V e3 = e1 * fma(e1, e1 + 3.0 * group.c, all(group.c * group.c));
        sum[r30] = fma(E, fma(e3, m[r00], fma(3.0 * e2, m[r10], fma(3.0 * e1, m[r20], m[r30]))), sum[r30]);
        sum[r21] = fma(E, fma(e2, m[r01], fma(2.0 * e1, m[r11], m[r21])), sum[r21]);
        sum[r12] = fma(E, fma(e1, m[r02], m[r12]), sum[r12]);
        sum[r03] = fma(E, m[r03], sum[r03]);
      }
    }
  }
}

template <int N>
void addSeparableTerms(const EquationPlan& plan, V tau1, V delta1, const V* tau, const V* delta,
                       Rows<N>& sum) {
  using Kind = EquationPlan::Separable::Kind;
  for (const EquationPlan::Separable& term : plan.separable) {
    V exponent;
    std::array<V, 3> g;  // theta_d^1..3 of the exponent's part in delta
    std::array<V, 3> h;  // theta_t^1..3 of its part in tau
    if (term.kind == Kind::double_damped) {
      const V dc = delta[term.c_power];
      const V tm = tau[term.m_power];
      exponent = -dc - tm;
      g = {-term.c * dc, -term.c * term.c * dc, -term.c * term.c * term.c * dc};
      h = {-term.m * tm, -term.m * term.m * tm, -term.m * term.m * term.m * tm};
    } else {
      const V x = delta1 - term.epsilon;
      const V y = tau1 - term.gamma;
      const V a = -2.0 * term.alpha * delta1;
      g = {a * x, a * (x + delta1), a * (x + 3.0 * delta1)};
      if (term.kind == Kind::bell) {
        const V b = -2.0 * term.beta * tau1;
        exponent = -term.alpha * (x * x) - term.beta * (y * y);
        h = {b * y, b * (y + tau1), b * (y + 3.0 * tau1)};
      } else {
        const V k = 1.0 / fma(y * y, term.beta, all(term.b));
        const V b = 2.0 * term.beta * tau1;
        const V q1 = b * y * k;
        const V q2 = b * (y + tau1) * k;
        const V q3 = b * (y + 3.0 * tau1) * k;
        exponent = k - term.alpha * (x * x);
        h = {-k * q1, k * (2.0 * q1 * q1 - q2), k * (6.0 * q1 * q2 - 6.0 * q1 * q1 * q1 - q3)};
      }
    }
    const I negligible = exponent < all(kNegligible);
    if (everywhere(negligible)) continue;
    V F = term.n * delta[term.delta_power] * tau[term.tau_power] * exp(exponent);
    F = select(negligible, V{}, F);
    addSeparable<N>(sum, F, ofLogarithm(term.d + g[0], g[1], g[2]), ofLogarithm(term.t + h[0], h[1], h[2]));
  }
}

/// P = |delta - 1|^(2k) and its theta_d derivatives, y = delta/(delta - 1), theta_d y = y - y^2.
inline std::array<V, 4> powerOfDistance(V log_x, V y, double k) {
  const V P = exp(k * log_x);
  const V l1 = 2.0 * k * y;
  const V l2 = l1 * (1.0 - y);
  const V l3 = l2 * (1.0 - 2.0 * y);
  const auto factor = ofLogarithm(l1, l2, l3);
  return {P, P * factor[1], P * factor[2], P * factor[3]};
}

/// ln Delta, Delta = theta^2 + B |delta - 1|^(2a) with theta = 1 - tau + A |delta - 1|^(1/beta), and its
/// theta derivatives. Terms of one equation mostly share it.
struct LogDistance {
  V value, l10, l01, l20, l11, l02, l30, l21, l12, l03;
};

template <int N, typename Term>
LogDistance logDistance(const Term& term, V tau, V log_x, V y) {
  const auto P = powerOfDistance(log_x, y, 1 / (2 * term.beta));
  const auto Q = powerOfDistance(log_x, y, term.a);
  const V theta = fma(P[0], term.A, 1.0 - tau);
  // theta_t^j theta = -tau for every j >= 1; theta has no mixed derivatives.
  const V D = fma(theta, theta, term.B * Q[0]);
  const V k = 1.0 / D;
  const V p1 = term.A * P[1];
  const V p2 = term.A * P[2];
  const V d10 = (2.0 * theta * p1 + term.B * Q[1]) * k;
  const V d01 = -2.0 * theta * tau * k;
  const V d20 = (2.0 * (p1 * p1 + theta * p2) + term.B * Q[2]) * k;
  const V d11 = -2.0 * p1 * tau * k;
  const V d02 = 2.0 * tau * (tau - theta) * k;
  LogDistance out{};
  out.value = log(D);
  out.l10 = d10;
  out.l01 = d01;
  out.l20 = d20 - d10 * d10;
  out.l11 = d11 - d10 * d01;
  out.l02 = d02 - d01 * d01;
  if constexpr (N >= 3) {
    const V p3 = term.A * P[3];
    const V d30 = (2.0 * (3.0 * p1 * p2 + theta * p3) + term.B * Q[3]) * k;
    const V d21 = -2.0 * p2 * tau * k;
    const V d12 = d11;
    const V d03 = 2.0 * tau * (3.0 * tau - theta) * k;
    out.l30 = d30 - 3.0 * d10 * d20 + 2.0 * d10 * d10 * d10;
    out.l21 = d21 - d11 * d10 - out.l20 * d01 - d10 * out.l11;
    out.l12 = d12 - d11 * d01 - out.l02 * d10 - d01 * out.l11;
    out.l03 = d03 - 3.0 * d01 * d02 + 2.0 * d01 * d01 * d01;
  }
  return out;
}

template <int N>
void addNonanalytic(const EquationPlan& plan, V tau, V delta, Rows<N>& sum) {
  if (plan.nonanalytic.empty()) return;
  V x1 = delta - 1.0;
  const V size = select(x1 < V{}, -x1, x1);
  x1 = select(size < all(1e-10), all(1e-10), x1);
  const V x = x1 * x1;
  const V t1 = tau - 1.0;
  const auto* computed = plan.nonanalytic.data();  // the term that `l` stands for
  LogDistance l;
  bool known = false;
  for (const auto& term : plan.nonanalytic) {
    const V log_psi = -term.C * x - term.D * (t1 * t1);
    const I negligible = log_psi < all(kNegligible);
    if (everywhere(negligible)) continue;
    if (!known || term.beta != computed->beta || term.a != computed->a || term.A != computed->A ||
        term.B != computed->B) {
      l = logDistance<N>(term, tau, log(x), delta / x1);
      computed = &term;
      known = true;
    }
    const V L10 = term.b * l.l10 + (1.0 - 2.0 * term.C * delta * (delta - 1.0));
    const V L01 = term.b * l.l01 - 2.0 * term.D * tau * t1;
    const V L20 = term.b * l.l20 - 2.0 * term.C * delta * (2.0 * delta - 1.0);
    const V L11 = term.b * l.l11;
    const V L02 = term.b * l.l02 - 2.0 * term.D * tau * (2.0 * tau - 1.0);
    V F = term.n * delta * exp(fma(l.value, term.b, log_psi));
    F = select(negligible, V{}, F);
    sum[r00] += F;
    if constexpr (N >= 1) {
      sum[r10] = fma(F, L10, sum[r10]);
      sum[r01] = fma(F, L01, sum[r01]);
    }
    if constexpr (N >= 2) {
      sum[r20] = fma(F, fma(L10, L10, L20), sum[r20]);
      sum[r11] = fma(F, fma(L10, L01, L11), sum[r11]);
      sum[r02] = fma(F, fma(L01, L01, L02), sum[r02]);
    }
    if constexpr (N >= 3) {
      const V L30 = term.b * l.l30 - 2.0 * term.C * delta * (4.0 * delta - 1.0);
      const V L21 = term.b * l.l21;
      const V L12 = term.b * l.l12;
      const V L03 = term.b * l.l03 - 2.0 * term.D * tau * (4.0 * tau - 1.0);
      sum[r30] = fma(F, L30 + 3.0 * L20 * L10 + L10 * L10 * L10, sum[r30]);
      sum[r21] = fma(F, L21 + 2.0 * L11 * L10 + L20 * L01 + L10 * L10 * L01, sum[r21]);
      sum[r12] = fma(F, L12 + 2.0 * L11 * L01 + L02 * L10 + L01 * L01 * L10, sum[r12]);
      sum[r03] = fma(F, L03 + 3.0 * L02 * L01 + L01 * L01 * L01, sum[r03]);
    }
  }
}

/// All powers that the plan needs. base^0 = 1; base = 0 gives 0 for fractional exponents.
void buildPowers(const PowerList& list, V base, V* out) {
  const I nothing = base <= V{};
  const V logarithm = list.usesLogarithm() ? log(select(nothing, all(1.0), base)) : V{};
  std::size_t k = 0;
  for (const PowerStep& step : list.steps()) {
    switch (step.kind) {
      case PowerStep::Kind::one:
        out[k] = all(1.0);
        break;
      case PowerStep::Kind::base:
        out[k] = base;
        break;
      case PowerStep::Kind::product:
        out[k] = out[step.a] * out[step.b];
        break;
      case PowerStep::Kind::exponential:
        out[k] = select(nothing, V{}, exp(step.exponent * logarithm));
        break;
    }
    ++k;
  }
}

template <int N>
void evaluate(const EquationPlan& plan, int lanes, const Row& T, const Row& rho, ResidualTile& out) {
  std::array<V, EquationPlan::kMostPowers> tau;
  std::array<V, EquationPlan::kMostPowers> delta;
  for (int first = 0; first < lanes; first += kWidth) {
    const V tau1 = plan.scale_T / load(T.data() + first);
    const V delta1 = load(rho.data() + first) / plan.scale_rho;
    buildPowers(plan.tau, tau1, tau.data());
    buildPowers(plan.delta, delta1, delta.data());
    Rows<N> sum;
    addGroups<N>(plan, tau.data(), delta.data(), sum);
    addSeparableTerms<N>(plan, tau1, delta1, tau.data(), delta.data(), sum);
    addNonanalytic<N>(plan, tau1, delta1, sum);
    for (int i = 0; i < Rows<N>::kCount; ++i) store(out[static_cast<std::size_t>(i)].data() + first, sum[i]);
  }
}

}  // namespace

void residual(const EquationPlan& plan, Order order, int count, const Row& T, const Row& rho,
              ResidualTile& out) {
  const int lanes = paddedLanes(count);
  switch (order) {
    case Order::zeroth:
      evaluate<0>(plan, lanes, T, rho, out);
      break;
    case Order::first:
      evaluate<1>(plan, lanes, T, rho, out);
      break;
    case Order::second:
      evaluate<2>(plan, lanes, T, rho, out);
      break;
    case Order::third:
      evaluate<3>(plan, lanes, T, rho, out);
      break;
  }
}

}  // namespace holdfast::thermo::HOLDFAST_VARIANT
