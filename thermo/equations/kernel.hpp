// The kernel: jets of a compiled reference equation, lanes side by side. One source (kernel_body.hpp) is
// compiled for three instruction sets; the best that the processor has is chosen once.
#pragma once

#include <string_view>

#include "thermo/equations/ideal.hpp"
#include "thermo/equations/plan.hpp"
#include "thermo/jet/jet.hpp"

namespace holdfast::thermo {

/// The functions that exist once an instruction set.
struct Kernels {
  std::string_view name;  ///< "avx512" | "avx2" | "baseline"

  /// Fills residual rows of `order` for lanes 0..paddedLanes(count)-1. T in K, rho in mol/m3, filled.
  void (*residual)(const EquationPlan& plan, Order order, int count, const Row& T, const Row& rho,
                   ResidualTile& out);

  /// Fills the ideal rows of `order` likewise.
  void (*ideal)(const IdealHeatCapacity& cp0, IdealConstants constants, Order order, int count, const Row& T,
                IdealTile& out);
};

/// The best that this processor runs, chosen once. The environment variable HOLDFAST_KERNEL may ask for a
/// lesser one by name.
const Kernels& kernels();

/// A variant by name, or nullptr if this processor cannot run it (or the name is unknown).
const Kernels* kernelsOf(std::string_view name);

}  // namespace holdfast::thermo
