// Published multiparameter Helmholtz equations, compiled at construction into a plan of vector steps.
//
// Why it is fast: theta_d and theta_t act diagonally on monomials, theta_d^i theta_t^j (n delta^d tau^t) =
// d^i t^j n delta^d tau^t, so every derivative of every order is one constant linear map of the same
// monomials. Powers of delta are built by multiplication, tau^t costs one vector exp a distinct t (none if t
// is an integer), and a shared envelope exp(-delta^c), or a bell, is applied once to a whole group of terms
// by the product rule.
//
// The kernel is compiled for AVX-512, AVX2 and plain x86-64 and chosen when the program starts. AVX-512
// and AVX2 give the same bits (explicit fused operations, no contraction); plain x86-64 rounds twice.
#pragma once

#include <memory>

#include "thermo/equations/equation.hpp"
#include "thermo/fluids/equation_data.hpp"

namespace holdfast::thermo {

class ReferenceEquation final : public Equation {
 public:
  explicit ReferenceEquation(const ReferenceEquationData& data);
  ~ReferenceEquation() override;

  int components() const override { return 1; }
  void residual(Order order, const EquationStates& states, ResidualTile& out) const override;
  double gasConstant(int component) const override;
  double densityLimit(const std::array<double, kMostComponents>& z) const override;

 private:
  struct Plan;
  std::unique_ptr<const Plan> plan_;
};

}  // namespace holdfast::thermo
