#include "thermo/equilibrium/stability.hpp"

#include <algorithm>
#include <cmath>

namespace holdfast::thermo {

namespace {

using Vector = std::array<double, kMostComponents>;

/// What a trial came to.
enum class Trial { trivial, above, below, unfinished };

/// The tangent plane at the tested phase, and the trials against it. Letters as in Michelsen (1982):
/// stationary points of
///   tm(W) = 1 + sum_i W_i (ln W_i + ln phi_i(w) - d_i - 1),   w = W/sum W,   d_i = ln z_i + ln phi_i(z)
/// lie below the plane if and only if tm < 0.
class TangentPlane {
 public:
  TangentPlane(const Cubic& equation, const Composition& z, double T, double rho)
      : equation_(equation),
        z_(z),
        T_(T),
        p_(equation.pressure(z, T, rho)),
        n_(static_cast<std::size_t>(equation.components())) {
    const Vector phi = equation.logFugacityCoefficients(z, T, rho);
    for (std::size_t i = 0; i < n_; ++i) d_[i] = z[i] > 0 ? std::log(z[i]) + phi[i] : 0;
  }

  double pressure() const { return p_; }

  /// Follows one trial down by successive substitution, accelerated along the dominant eigenvector (Orbach
  /// and Crowe, Can. J. Chem. Eng. 49 (1971) 509) every fifth step. Any point below the plane ends it: the
  /// phase is unstable whether or not it is stationary.
  Trial run(Vector W) const {
    constexpr int kMostSteps = 500;
    constexpr double kBelow = -1e-10;    // of tm: above the rounding of its terms
    constexpr double kTrivial = 1e-6;    // of |ln(W/z)|: the trial has come back to the tested phase
    constexpr double kConverged = 1e-9;  // of the step in ln W
    Vector step_before{};
    for (int count = 1; count <= kMostSteps; ++count) {
      double sum = 0;
      for (std::size_t i = 0; i < n_; ++i) sum += W[i];
      Composition w{};
      for (std::size_t i = 0; i < n_; ++i) w[i] = W[i] / sum;
      const Vector phi = lowestPhase(w);
      double tm = 1;
      double distance = 0;
      double size = 0;
      double along = 0;
      double before = 0;
      Vector step{};
      for (std::size_t i = 0; i < n_; ++i) {
        if (z_[i] <= 0) continue;
        const double log_W = std::log(W[i]);
        step[i] = d_[i] - phi[i] - log_W;
        tm -= W[i] * (step[i] + 1);
        const double from_z = log_W - std::log(z_[i]);
        distance += from_z * from_z;
        size += step[i] * step[i];
        along += step[i] * step_before[i];
        before += step_before[i] * step_before[i];
      }
      if (!std::isfinite(tm)) return Trial::unfinished;
      if (tm < kBelow) return Trial::below;
      if (distance < kTrivial * kTrivial) return Trial::trivial;
      if (size < kConverged * kConverged) return Trial::above;
      double stretch = 1;
      if (count % 5 == 0 && before > 0) {
        const double eigenvalue = along / before;
        if (eigenvalue > 0 && eigenvalue < 0.99) stretch = std::min(1 / (1 - eigenvalue), 10.0);
      }
      for (std::size_t i = 0; i < n_; ++i)
        if (z_[i] > 0) W[i] *= std::exp(stretch * step[i]);
      step_before = step;
    }
    return Trial::unfinished;
  }

 private:
  /// ln phi of the root of lower Gibbs energy at the tested pressure.
  Vector lowestPhase(const Composition& w) const {
    const Cubic::Roots roots = equation_.densities(w, T_, p_);
    Vector best = equation_.logFugacityCoefficients(w, T_, roots.rho[0]);
    if (roots.count == 1) return best;
    // The middle root is never the lowest.
    const Vector dense =
        equation_.logFugacityCoefficients(w, T_, roots.rho[static_cast<std::size_t>(roots.count - 1)]);
    double difference = 0;
    for (std::size_t i = 0; i < n_; ++i) difference += w[i] * (dense[i] - best[i]);
    return difference < 0 ? dense : best;
  }

  const Cubic& equation_;
  const Composition& z_;
  double T_, p_;
  std::size_t n_;
  Vector d_{};
};

}  // namespace

Stability testStability(const Cubic& equation, const Composition& z, double T, double rho) {
  const TangentPlane plane(equation, z, T, rho);
  const auto n = static_cast<std::size_t>(equation.components());
  if (!(plane.pressure() > 0)) return Stability::unstable;  // a liquid under tension
  Vector K{};
  for (std::size_t i = 0; i < n; ++i) {
    const CubicComponent& c = equation.given(static_cast<int>(i));
    K[i] = c.p_critical / plane.pressure() *
           std::exp(5.373 * (1 + c.acentric_factor) * (1 - c.T_critical / T));  // Wilson (1968)
  }
  bool decided = false;
  const auto below = [&](const Vector& W) {
    const Trial found = plane.run(W);
    decided = decided || found != Trial::unfinished;
    return found == Trial::below;
  };
  Vector vapour{};
  Vector liquid{};
  for (std::size_t i = 0; i < n; ++i) {
    vapour[i] = z[i] * K[i];
    liquid[i] = z[i] / K[i];
  }
  if (below(vapour) || below(liquid)) return Stability::unstable;
  for (std::size_t pure = 0; pure < n; ++pure) {
    if (z[pure] <= 0 || z[pure] > 0.999) continue;
    Vector nearly{};
    for (std::size_t i = 0; i < n; ++i) nearly[i] = i == pure ? 0.999 : 0.001 * z[i];
    if (below(nearly)) return Stability::unstable;
  }
  return decided ? Stability::stable : Stability::undecided;
}

}  // namespace holdfast::thermo
