#include "thermo/equations/cubic.hpp"

#include <algorithm>
#include <cassert>
#include <cmath>

namespace holdfast::thermo {

namespace {

constexpr double kR = 8.31446261815324;  // J/(mol K), exact since 2019

/// c3 y^3 + c2 y^2 + c1 y + c0
struct Polynomial {
  double c3, c2, c1, c0;
  double at(double y) const { return ((c3 * y + c2) * y + c1) * y + c0; }
  double slope(double y) const { return (3 * c3 * y + 2 * c2) * y + c1; }
};

/// The root between two places of opposite sign: Newton's steps, halving where one would leave the bracket.
double rootBetween(const Polynomial& f, double low, double high) {
  if (f.at(low) == 0) return low;
  if (f.at(high) == 0) return high;
  const bool rising = f.at(low) < 0;
  double y = 0.5 * (low + high);
  for (int step = 0; step < 200; ++step) {
    const double value = f.at(y);
    if (value == 0) return y;
    ((value > 0) == rising ? high : low) = y;
    double next = y - value / f.slope(y);
    if (!(next > low && next < high)) next = 0.5 * (low + high);
    if (std::abs(next - y) <= 3e-16 * y) return next;  // a unit in the last place
    y = next;
  }
  return y;
}

}  // namespace

Cubic::Form Cubic::formOf(CubicFamily family) {
  const int u = family == CubicFamily::peng_robinson ? 2 : 1;
  const int w = family == CubicFamily::peng_robinson ? -1 : 0;
  // At the critical point Z^3 + [(u-1)B - 1] Z^2 + [A + (w-u)B^2 - uB] Z - (AB + wB^2 + wB^3) is (Z - Z_c)^3.
  // Equal coefficients give Z_c and A in terms of B and leave one equation for B, solved by secants.
  const auto Z = [&](long double B) { return (1 - (u - 1) * B) / 3; };
  const auto A = [&](long double B) { return 3 * Z(B) * Z(B) - (w - u) * B * B + u * B; };
  const auto f = [&](long double B) { return Z(B) * Z(B) * Z(B) - A(B) * B - w * B * B - w * B * B * B; };
  long double before = 0.07L;
  long double B = 0.08L;
  for (int step = 0; step < 40 && f(B) != f(before); ++step) {
    const long double next = B - f(B) * (B - before) / (f(B) - f(before));
    before = B;
    B = next;
  }
  const double root = std::sqrt(static_cast<double>(u * u - 4 * w));
  return {static_cast<double>(u),    static_cast<double>(w), (u + root) / 2,           (u - root) / 2,
          static_cast<double>(A(B)), static_cast<double>(B), static_cast<double>(Z(B))};
}

double Cubic::criticalCompressibility(CubicFamily family) {
  return formOf(family).Z_critical;
}

Cubic::Cubic(CubicFamily family, std::vector<CubicComponent> components, std::vector<std::vector<double>> kij)
    : form_(formOf(family)), given_(std::move(components)), kij_(std::move(kij)) {
  assert(!given_.empty() && given_.size() <= kMostComponents && kij_.size() == given_.size());
  for (const CubicComponent& c : given_) {
    const double omega = c.acentric_factor;
    const double m = family == CubicFamily::peng_robinson
                         ? 0.37464 + 1.54226 * omega - 0.26992 * omega * omega
                         : 0.480 + 1.574 * omega - 0.176 * omega * omega;
    // sqrt(a_i) = sqrt(Omega_a) R T_c/sqrt(p_c) [1 + m (1 - sqrt(T/T_c))]
    const double root = std::sqrt(form_.omega_a * kR / c.p_critical) * c.T_critical;
    components_.push_back({root * (1 + m), root * m / std::sqrt(c.T_critical),
                           form_.omega_b * kR * c.T_critical / c.p_critical});
  }
}

int Cubic::components() const {
  return static_cast<int>(components_.size());
}
double Cubic::gasConstant(int) const {
  return kR;
}

double Cubic::densityLimit(const std::array<double, kMostComponents>& z) const {
  double b = 0;
  for (std::size_t i = 0; i < components_.size(); ++i) b += z[i] * components_[i].b;
  return (1 - 1e-9) / b;
}

void Cubic::residual(Order order, const EquationStates& states, ResidualTile& out) const {
  const std::size_t n = components_.size();
  const int top = static_cast<int>(order);
  const Form& form = form_;
  for (int k = 0; k < paddedLanes(states.count); ++k) {
    const double inverse_root = 1 / std::sqrt((*states.T)[k]);
    // e_i = sqrt(a_i/(R T)) and its theta_t derivatives: theta_t T^(-1/2) = T^(-1/2)/2.
    std::array<std::array<double, 4>, kMostComponents> e;
    double b = 0;
    for (std::size_t i = 0; i < n; ++i) {
      const double z = states.z == nullptr ? 1 : states.z[i][k];
      const double hot = components_[i].hot * inverse_root;
      e[i] = {z * (hot - components_[i].cold), z * hot / 2, z * hot / 4, z * hot / 8};
      b += z * components_[i].b;
    }
    std::array<double, 4> A{};  // theta_t^j a/(b R T)
    for (std::size_t i = 0; i < n; ++i)
      for (std::size_t j = 0; j < n; ++j) {
        const double weight = 1 - kij_[i][j];
        A[0] += weight * e[i][0] * e[j][0];
        A[1] += weight * 2 * e[i][0] * e[j][1];
        A[2] += weight * 2 * (e[i][1] * e[j][1] + e[i][0] * e[j][2]);
        A[3] += weight * 2 * (3 * e[i][1] * e[j][2] + e[i][0] * e[j][3]);
      }
    for (double& each : A) each /= b;

    const double y = b * (*states.rho)[k];
    const double Q = 1 + y * (form.u + form.w * y);
    const double free = 1 - y;
    // theta_d^i of -ln(1-y) and of L
    std::array<double, 4> repulsion;
    std::array<double, 4> L;
    repulsion[0] = -std::log1p(-y);
    L[0] = (std::log1p(form.k1 * y) - std::log1p(form.k2 * y)) / (form.k1 - form.k2);
    repulsion[1] = y / free;
    L[1] = y / Q;
    repulsion[2] = repulsion[1] / free;
    L[2] = L[1] * (1 - form.w * y * y) / Q;
    repulsion[3] = repulsion[2] * (1 + y) / free;
    L[3] = L[1] * ((1 - 3 * form.w * y * y) * Q - 2 * y * (1 - form.w * y * y) * (form.u + 2 * form.w * y)) /
           (Q * Q);

    std::size_t row = 0;
    for (int total = 0; total <= top; ++total)
      for (int t = 0; t <= total; ++t, ++row) {
        const auto d = static_cast<std::size_t>(total - t);
        out[row][k] = (t == 0 ? repulsion[d] : 0) - L[d] * A[static_cast<std::size_t>(t)];
      }
  }
}

Cubic::Mixed Cubic::mixed(const std::array<double, kMostComponents>& z, double T) const {
  const double inverse_root = 1 / std::sqrt(T);
  std::array<double, kMostComponents> e{};
  Mixed out{0, 0};
  for (std::size_t i = 0; i < components_.size(); ++i) {
    e[i] = z[i] * (components_[i].hot * inverse_root - components_[i].cold);
    out.b += z[i] * components_[i].b;
  }
  for (std::size_t i = 0; i < components_.size(); ++i)
    for (std::size_t j = 0; j < components_.size(); ++j) out.A += (1 - kij_[i][j]) * e[i] * e[j];
  out.A /= out.b;
  return out;
}

double Cubic::pressure(const std::array<double, kMostComponents>& z, double T, double rho) const {
  const auto [A, b] = mixed(z, T);
  const double y = b * rho;
  return rho * kR * T * (1 / (1 - y) - A * y / (1 + y * (form_.u + form_.w * y)));
}

Cubic::Roots Cubic::densities(const std::array<double, kMostComponents>& z, double T, double p) const {
  const auto [A, b] = mixed(z, T);
  const double B = p * b / (kR * T);
  const double u = form_.u;
  const double w = form_.w;
  // y Q - A y^2 (1-y) - B (1-y) Q = 0: below zero at y = 0, above at y = 1.
  const Polynomial f{w + A + B * w, u - A - B * (w - u), 1 - B * (u - 1), -B};
  // Between the places where the slope vanishes f is monotonic: at most one root in each part.
  std::array<double, 4> ends{0, 1, 1, 1};
  int parts = 1;
  const double half = f.c2 / 3;
  const double discriminant = half * half - f.c3 * f.c1 / 3;
  if (discriminant > 0 && f.c3 != 0) {
    const double q = -(half + std::copysign(std::sqrt(discriminant), half));
    std::array<double, 2> flat{q / f.c3, q == 0 ? 0 : f.c1 / (3 * q)};
    std::sort(flat.begin(), flat.end());
    for (const double y : flat)
      if (y > ends[static_cast<std::size_t>(parts - 1)] && y < 1) {
        ends[static_cast<std::size_t>(parts)] = y;
        ends[static_cast<std::size_t>(++parts)] = 1;
      }
  }
  Roots roots{};
  for (int part = 0; part < parts; ++part) {
    const double low = ends[static_cast<std::size_t>(part)];
    const double high = ends[static_cast<std::size_t>(part) + 1];
    if (f.at(low) * f.at(high) > 0) continue;
    const double y = rootBetween(f, low, high);
    if (roots.count > 0 && y / b <= roots.rho[static_cast<std::size_t>(roots.count - 1)]) continue;
    roots.rho[static_cast<std::size_t>(roots.count++)] = y / b;
  }
  return roots;
}

std::array<double, kMostComponents> Cubic::logFugacityCoefficients(
    const std::array<double, kMostComponents>& z, double T, double rho) const {
  const std::size_t n = components_.size();
  const auto [A, b] = mixed(z, T);
  const double inverse_root = 1 / std::sqrt(T);
  const double y = b * rho;
  const double Q = 1 + y * (form_.u + form_.w * y);
  const double Z = 1 / (1 - y) - A * y / Q;
  const double L = (std::log1p(form_.k1 * y) - std::log1p(form_.k2 * y)) / (form_.k1 - form_.k2);
  std::array<double, kMostComponents> e{};
  for (std::size_t i = 0; i < n; ++i) e[i] = components_[i].hot * inverse_root - components_[i].cold;
  std::array<double, kMostComponents> out{};
  for (std::size_t i = 0; i < n; ++i) {
    double cross = 0;  // sum_j z_j a_ij/(R T)
    for (std::size_t j = 0; j < n; ++j) cross += z[j] * (1 - kij_[i][j]) * e[i] * e[j];
    const double share = components_[i].b / b;
    // d(n alphar)/dn_i at T, V, less ln Z: Peng and Robinson (1976), Eq. (21), in density
    out[i] = share * (Z - 1) - std::log1p(-y) - std::log(Z) - L * (2 * cross / b - A * share);
  }
  return out;
}

}  // namespace holdfast::thermo
