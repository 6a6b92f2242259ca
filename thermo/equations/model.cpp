#include "thermo/equations/model.hpp"

#include <algorithm>
#include <cassert>
#include <cmath>

namespace holdfast::thermo {

Model::Model(std::shared_ptr<const Equation> equation, std::vector<ModelComponent> components,
             std::vector<IdealPart> ideal)
    : equation_(std::move(equation)), components_(std::move(components)), ideal_(std::move(ideal)) {
  assert(equation_->components() == static_cast<int>(components_.size()));
  assert(ideal_.size() == components_.size());
}

double Model::gasConstant(const Composition& z) const {
  double sum = 0;
  for (int i = 0; i < components(); ++i) sum += z[static_cast<std::size_t>(i)] * equation_->gasConstant(i);
  return sum;
}

double Model::molarMass(const Composition& z) const {
  double sum = 0;
  for (int i = 0; i < components(); ++i) sum += z[static_cast<std::size_t>(i)] * component(i).M;
  return sum;
}

void Model::residual(Order order, int count, const Row& T, const Row& rho, const Composition& z,
                     ResidualTile& out) const {
  Row filledT = T;
  Row filledRho = rho;
  filledT.fill(count);
  filledRho.fill(count);
  EquationStates states{count, &filledT, &filledRho, nullptr};
  std::array<Row, kMostComponents> fractions;
  if (!isPure()) {
    for (int i = 0; i < components(); ++i)
      fractions[static_cast<std::size_t>(i)].lane.fill(z[static_cast<std::size_t>(i)]);
    states.z = fractions.data();
  }
  equation_->residual(order, states, out);
}

void Model::jets(Order order, int count, const Row& T, const Row& rho, const Composition& z,
                 JetTile& out) const {
  out.count = count;
  out.order = order;
  out.T = T;
  out.rho = rho;
  out.T.fill(count);
  out.rho.fill(count);
  out.R = gasConstant(z);
  out.M = molarMass(z);
  residual(order, count, out.T, out.rho, z, out.residual);
  if (isPure()) {
    ideal_[0].evaluate(order, count, out.T, out.ideal);
    return;
  }
  // f(T) of the blend: sum z_i (R_i f_i/R + ln z_i); a component that is absent adds nothing.
  const int rows = idealRows(order);
  const int lanes = paddedLanes(count);
  for (int r = 0; r < rows; ++r) std::fill_n(out.ideal[static_cast<std::size_t>(r)].data(), lanes, 0.0);
  IdealTile part;
  for (int i = 0; i < components(); ++i) {
    const double zi = z[static_cast<std::size_t>(i)];
    if (zi == 0) continue;
    ideal_[static_cast<std::size_t>(i)].evaluate(order, count, out.T, part);
    const double weight = zi * equation_->gasConstant(i) / out.R;
    for (int r = 0; r < rows; ++r) {
      Row& sum = out.ideal[static_cast<std::size_t>(r)];
      const Row& term = part[static_cast<std::size_t>(r)];
      for (int k = 0; k < lanes; ++k) sum[k] += weight * term[k];
    }
    for (int k = 0; k < lanes; ++k) out.ideal[i_f][k] += weight * std::log(zi);
  }
}

}  // namespace holdfast::thermo
