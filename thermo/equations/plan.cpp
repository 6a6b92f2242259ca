#include "thermo/equations/plan.hpp"

#include <algorithm>
#include <cassert>
#include <cmath>
#include <map>

namespace holdfast::thermo {

PowerList::PowerList() {
  steps_.push_back({PowerStep::Kind::one, 0, 0, 0});
  exponents_.push_back(0);
}

int PowerList::need(double exponent) {
  const auto known = std::find(exponents_.begin(), exponents_.end(), exponent);
  if (known != exponents_.end()) return static_cast<int>(known - exponents_.begin());
  PowerStep step{PowerStep::Kind::exponential, 0, 0, exponent};
  if (exponent == 1) {
    step.kind = PowerStep::Kind::base;
  } else if (exponent > 1 && exponent == std::floor(exponent)) {
    const double half = std::floor(exponent / 2);
    step.kind = PowerStep::Kind::product;
    step.a = need(half);
    step.b = need(exponent - half);
  } else {
    uses_logarithm_ = true;
  }
  steps_.push_back(step);
  exponents_.push_back(exponent);
  assert(steps_.size() <= EquationPlan::kMostPowers);
  return static_cast<int>(steps_.size()) - 1;
}

EquationPlan::EquationPlan(const ReferenceEquationData& data)
    : R(data.R), scale_T(data.scale_T), scale_rho(data.scale_rho), nonanalytic(data.nonanalytic) {
  // envelope exponent c -> delta exponent d -> terms (t, n)
  std::map<double, std::map<double, std::vector<std::pair<double, double>>>> grouped;
  for (const auto& term : data.plain) grouped[0][term.d].emplace_back(term.t, term.n);
  for (const auto& term : data.damped) grouped[term.c][term.d].emplace_back(term.t, term.n);
  for (const auto& [c, by_delta] : grouped) {
    groups.push_back({c, delta.need(c), static_cast<int>(by_delta.size())});
    for (const auto& [d, monomials] : by_delta) {
      powers.push_back({delta.need(d), {1, d, d * d, d * d * d}, static_cast<int>(monomials.size())});
      for (const auto& [t, n] : monomials)
        terms.push_back({tau.need(t), {n, n * t, n * t * t, n * t * t * t}});
    }
  }
  for (const auto& term : data.double_damped)
    separable.push_back({Separable::Kind::double_damped, term.n, term.d, term.t, delta.need(term.d),
                         tau.need(term.t), term.c, term.m, delta.need(term.c), tau.need(term.m), 0, 0, 0, 0,
                         0});
  for (const auto& term : data.bell)
    separable.push_back({Separable::Kind::bell, term.n, term.d, term.t, delta.need(term.d), tau.need(term.t),
                         0, 0, 0, 0, term.alpha, term.beta, term.gamma, term.epsilon, 0});
  for (const auto& term : data.inverse_bell)
    separable.push_back({Separable::Kind::inverse_bell, term.n, term.d, term.t, delta.need(term.d),
                         tau.need(term.t), 0, 0, 0, 0, term.alpha, term.beta, term.gamma, term.epsilon,
                         term.b});
  // The densest liquids of the published ranges lie below 4.2 of the reducing density (compressed hydrogen
  // fluoro-ethers about 3.6, water 4.0).
  density_limit = 5 * scale_rho;
}

}  // namespace holdfast::thermo
