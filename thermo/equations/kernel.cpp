#include "thermo/equations/kernel.hpp"

#include <cstdlib>

namespace holdfast::thermo {

#define HOLDFAST_DECLARE(variant)                                                                          \
  namespace variant {                                                                                      \
  void residual(const EquationPlan& plan, Order order, int count, const Row& T, const Row& rho,            \
                ResidualTile& out);                                                                        \
  void ideal(const IdealHeatCapacity& cp0, IdealConstants constants, Order order, int count, const Row& T, \
             IdealTile& out);                                                                              \
  }
HOLDFAST_DECLARE(avx512)
HOLDFAST_DECLARE(avx2)
HOLDFAST_DECLARE(baseline)
#undef HOLDFAST_DECLARE

const Kernels* kernelsOf(std::string_view name) {
  static constexpr Kernels kAvx512{"avx512", &avx512::residual, &avx512::ideal};
  static constexpr Kernels kAvx2{"avx2", &avx2::residual, &avx2::ideal};
  static constexpr Kernels kBaseline{"baseline", &baseline::residual, &baseline::ideal};
  const bool has_avx512 = __builtin_cpu_supports("avx512f") != 0 && __builtin_cpu_supports("avx512dq") != 0;
  const bool has_avx2 = __builtin_cpu_supports("avx2") != 0 && __builtin_cpu_supports("fma") != 0;
  if (name == kAvx512.name && has_avx512) return &kAvx512;
  if (name == kAvx2.name && has_avx2) return &kAvx2;
  if (name == kBaseline.name) return &kBaseline;
  return nullptr;
}

const Kernels& kernels() {
  static const Kernels& chosen = *[] {
    if (const char* asked = std::getenv("HOLDFAST_KERNEL"); asked != nullptr)
      if (const Kernels* found = kernelsOf(asked); found != nullptr) return found;
    for (const std::string_view name : {"avx512", "avx2"})
      if (const Kernels* found = kernelsOf(name); found != nullptr) return found;
    return kernelsOf("baseline");
  }();
  return chosen;
}

}  // namespace holdfast::thermo
