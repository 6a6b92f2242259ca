// A reference equation compiled for the kernel: which powers of tau and delta are needed and how they are
// built, terms grouped by the envelope they share, coefficients multiplied out with the powers of their
// exponents.
#pragma once

#include <vector>

#include "thermo/fluids/equation_data.hpp"

namespace holdfast::thermo {

/// How one power of a base is made: whole exponents by multiplication from earlier ones, others by
/// exp(exponent ln base).
struct PowerStep {
  enum class Kind { one, base, product, exponential } kind;
  int a = 0, b = 0;     ///< product: indexes of earlier powers
  double exponent = 0;  ///< exponential
};

/// Distinct powers of one base. Index 0 is the zeroth power.
class PowerList {
 public:
  PowerList();
  /// Index of base^exponent, added with what it is made from if it is new.
  int need(double exponent);
  const std::vector<PowerStep>& steps() const { return steps_; }
  bool usesLogarithm() const { return uses_logarithm_; }

 private:
  std::vector<PowerStep> steps_;
  std::vector<double> exponents_;
  bool uses_logarithm_ = false;
};

struct EquationPlan {
  static constexpr int kMostPowers = 96;  ///< of each base; the loader refuses files that could need more

  /// n tau^t with its theta_t derivatives: factor[j] = n t^j.
  struct TauTerm {
    int power;
    double factor[4];
  };
  /// All terms of a group with one power of delta: factor[i] = d^i; `terms` TauTerms follow one another.
  struct DeltaPower {
    int power;
    double factor[4];
    int terms;
  };
  /// Terms that share exp(-delta^c); c = 0: no envelope. `powers` DeltaPowers follow one another.
  struct Group {
    double c;
    int envelope;  ///< index of delta^c
    int powers;
  };
  /// Terms with an envelope of their own, a product of one in delta and one in tau.
  struct Separable {
    enum class Kind { double_damped, bell, inverse_bell } kind;
    double n, d, t;
    int delta_power, tau_power;
    double c, m;  ///< double_damped: exp(-delta^c - tau^m)
    int c_power, m_power;
    double alpha, beta, gamma, epsilon, b;
  };

  explicit EquationPlan(const ReferenceEquationData& data);

  double R, scale_T, scale_rho;
  PowerList tau, delta;
  std::vector<Group> groups;
  std::vector<DeltaPower> powers;
  std::vector<TauTerm> terms;
  std::vector<Separable> separable;
  std::vector<ReferenceEquationData::Nonanalytic> nonanalytic;
  double density_limit;  ///< mol/m3
};

}  // namespace holdfast::thermo
