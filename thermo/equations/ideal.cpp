#include "thermo/equations/ideal.hpp"

#include "thermo/equations/kernel.hpp"

namespace holdfast::thermo {

IdealPart::IdealPart(IdealHeatCapacity cp0) : cp0_(std::move(cp0)) {}

IdealPart IdealPart::shifted(IdealConstants by) const {
  IdealPart out = *this;
  out.constants_.energy += by.energy;
  out.constants_.entropy += by.entropy;
  return out;
}

void IdealPart::evaluate(Order order, int count, const Row& T, IdealTile& out) const {
  kernels().ideal(cp0_, constants_, order, count, T, out);
}

}  // namespace holdfast::thermo
