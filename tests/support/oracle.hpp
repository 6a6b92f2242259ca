// The numerical truth of the tests: the molar Helmholtz energy A(T, rho) written down again from the
// published formulas, on power series of 50 digits in T and rho (not the logarithmic operators of the
// product), and what follows from A by differentiation.
#pragma once

#include <functional>
#include <vector>

#include "tests/support/series.hpp"
#include "thermo/equations/cubic.hpp"
#include "thermo/fluids/equation_data.hpp"
#include "thermo/jet/gradients.hpp"

namespace holdfast::oracle {

/// alphar(T, rho) of some equation at a fixed composition.
using Residual = std::function<Series(const Series& T, const Series& rho)>;

/// The multiparameter form, term kinds as in IAPWS R6-95(2018), Eq. (6) and thermo/fluids/data/FORMAT.md.
Residual referenceResidual(const thermo::ReferenceEquationData& data);

/// Peng and Robinson (1976), Soave (1972), van der Waals one-fluid mixing. `z` mole fractions.
Residual cubicResidual(thermo::CubicFamily family, const std::vector<thermo::CubicComponent>& components,
                       const std::vector<std::vector<double>>& kij, const std::vector<double>& z);

/// One component's ideal part: cp0 and what multiplies it (z_i R_i / R).
struct IdealShare {
  thermo::IdealHeatCapacity cp0;
  double weight = 1;
};

/// A pure fluid or a blend of fixed composition.
class Fluid {
 public:
  Fluid(Residual residual, std::vector<IdealShare> ideal, double R);

  /// Sets the two integration constants of the ideal part so that f and u0/(R T) take these values at T (of
  /// the program: constants are a convention, not a truth).
  void calibrate(double T, double f, double u0_over_RT);

  /// A in J/mol around (T, rho); derivatives up to third order.
  Series helmholtz(const Real& T, const Real& rho) const;

  /// The nine base quantities around (T, rho), derivatives up to second order.
  struct Bases {
    std::array<Series, thermo::kBases> of;
    const Series& operator[](thermo::Base base) const { return of[static_cast<std::size_t>(base)]; }
  };
  Bases bases(const Real& T, const Real& rho) const;

  const Real& R() const { return R_; }

 private:
  Residual residual_;
  std::vector<IdealShare> ideal_;
  Real R_;
  Real energy_ = 0, entropy_ = 0;
};

/// A derivative and the sum of the absolute terms of its numerator over the denominator: the yardstick near
/// zero crossings.
struct Derivative {
  Real value;
  Real absolute;
};
/// (dX/dY)_Z of single-phase states by Jacobians in (T, rho).
Derivative partial(const Fluid::Bases& bases, thermo::Base of, thermo::Base by, thermo::Base held);

/// Pure saturation at T by Newton's method at 50 digits, from starting densities.
struct Saturation {
  Real p, rho_liquid, rho_vapour;
};
Saturation saturation(const Fluid& fluid, const Real& T, Real rho_liquid, Real rho_vapour);

}  // namespace holdfast::oracle
