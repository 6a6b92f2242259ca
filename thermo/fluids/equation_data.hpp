// What is written down of an equation of state: plain data, as published.
#pragma once

#include <string>
#include <vector>

namespace holdfast::thermo {

/// The ideal-gas heat capacity as data: cp0/R = c0 + sum c (T/K)^e + sum v (u/T)^2 exp(u/T)/(exp(u/T)-1)^2.
struct IdealHeatCapacity {
  struct Power {
    double c;  ///< coefficient; (T in K)
    double e;  ///< exponent, not 0; -1 is allowed
  };
  struct Einstein {
    double v;  ///< weight
    double u;  ///< K
  };
  double c0 = 0;
  std::vector<Power> power;
  std::vector<Einstein> einstein;
};

/// One published multiparameter Helmholtz equation, as written down. Columns as in FORMAT.md (IAPWS
/// R6-95(2018), Table 2).
struct ReferenceEquationData {
  struct Plain {
    double d, t, n;
  };
  struct Damped {
    double c, d, t, n;
  };
  struct DoubleDamped {
    double c, m, d, t, n;
  };
  struct Bell {
    double d, t, n, alpha, beta, gamma, epsilon;
  };
  struct InverseBell {
    double d, t, n, alpha, beta, gamma, epsilon, b;
  };
  struct Nonanalytic {
    double a, b, B, n, C, D, A, beta;
  };

  std::string source;
  double R = 0;          ///< J/(mol K), as printed with the equation
  double scale_T = 0;    ///< K; tau = scale_T/T
  double scale_rho = 0;  ///< mol/m3; delta = rho/scale_rho
  std::vector<Plain> plain;
  std::vector<Damped> damped;
  std::vector<DoubleDamped> double_damped;
  std::vector<Bell> bell;
  std::vector<InverseBell> inverse_bell;
  std::vector<Nonanalytic> nonanalytic;
};

}  // namespace holdfast::thermo
