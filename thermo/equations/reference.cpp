#include "thermo/equations/reference.hpp"

#include "thermo/equations/kernel.hpp"
#include "thermo/equations/plan.hpp"

namespace holdfast::thermo {

struct ReferenceEquation::Plan : EquationPlan {
  using EquationPlan::EquationPlan;
};

ReferenceEquation::ReferenceEquation(const ReferenceEquationData& data)
    : plan_(std::make_unique<const Plan>(data)) {}
ReferenceEquation::~ReferenceEquation() = default;

void ReferenceEquation::residual(Order order, const EquationStates& states, ResidualTile& out) const {
  kernels().residual(*plan_, order, states.count, *states.T, *states.rho, out);
}

double ReferenceEquation::gasConstant(int) const {
  return plan_->R;
}

double ReferenceEquation::densityLimit(const std::array<double, kMostComponents>&) const {
  return plan_->density_limit;
}

}  // namespace holdfast::thermo
