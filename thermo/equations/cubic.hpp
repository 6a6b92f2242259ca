// Cubic equations, pure and van der Waals blends:
//   Peng-Robinson  D.-Y. Peng, D. B. Robinson, Ind. Eng. Chem. Fundam. 15 (1976) 59 (alpha function of 1976)
//   Soave          G. Soave, Chem. Eng. Sci. 27 (1972) 1197
// Omega_a, Omega_b and Z_c follow from the exact critical conditions, solved at construction, not from
// rounded constants.
#pragma once

#include <vector>

#include "thermo/equations/equation.hpp"

namespace holdfast::thermo {

enum class CubicFamily { peng_robinson, soave };

/// What a cubic equation knows of a component.
struct CubicComponent {
  double T_critical = 0;  ///< K
  double p_critical = 0;  ///< Pa
  double acentric_factor = 0;
};

class Cubic final : public Equation {
 public:
  /// kij: [i][j], symmetric, zero diagonal; R = 8.31446261815324 J/(mol K).
  Cubic(CubicFamily family, std::vector<CubicComponent> components, std::vector<std::vector<double>> kij);

  int components() const override;
  void residual(Order order, const EquationStates& states, ResidualTile& out) const override;
  double gasConstant(int component) const override;
  double densityLimit(const std::array<double, kMostComponents>& z) const override;

  /// Critical compressibility of the family (0.3074013... Peng-Robinson, 1/3 Soave).
  static double criticalCompressibility(CubicFamily family);

  /// The real roots of p(T, rho) = p with 0 < rho < 1/b, ascending, polished to the last digits. Never empty
  /// for p > 0.
  struct Roots {
    std::array<double, 3> rho;  ///< mol/m3
    int count = 0;
  };
  Roots densities(const std::array<double, kMostComponents>& z, double T, double p) const;

  /// p(T, rho) in Pa.
  double pressure(const std::array<double, kMostComponents>& z, double T, double rho) const;

  /// Critical constants of component i as given: starting values (Wilson) of phase equilibria.
  const CubicComponent& given(int i) const { return given_[static_cast<std::size_t>(i)]; }

  /// ln of the fugacity coefficients at (T, rho, z), one a component.
  std::array<double, kMostComponents> logFugacityCoefficients(const std::array<double, kMostComponents>& z,
                                                              double T, double rho) const;

 private:
  /// p = R T rho [1/(1 - y) - A y/Q], y = b rho, Q = 1 + u y + w y^2, A = a/(b R T), and the residual
  /// energy's attraction is -A L(y) with L = [ln(1 + k1 y) - ln(1 + k2 y)]/(k1 - k2), (1 + k1 y)(1 + k2 y) =
  /// Q.
  struct Form {
    double u, w, k1, k2;
    double omega_a, omega_b, Z_critical;
  };
  static Form formOf(CubicFamily family);

  /// sqrt(a_i/(R T)) = hot/sqrt(T) - cold; smooth also where alpha's root has passed zero (far above T_c).
  struct Component {
    double hot, cold;  ///< sqrt(m3 K/mol), sqrt(m3/mol)
    double b;          ///< m3/mol
  };
  /// a/(b R T) and b at T, z.
  struct Mixed {
    double A, b;
  };
  Mixed mixed(const std::array<double, kMostComponents>& z, double T) const;

  Form form_;
  std::vector<CubicComponent> given_;
  std::vector<Component> components_;
  std::vector<std::vector<double>> kij_;
};

}  // namespace holdfast::thermo
