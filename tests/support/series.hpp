// Truncated power series in two variables at 50 digits: an independent way to differentiate. Coefficient
// (i,j) belongs to (T - T0)^i (rho - rho0)^j, so that the partial derivative of order (i,j) is i! j! times
// it. Order 3 in total.
#pragma once

#include <array>
#include <boost/multiprecision/cpp_bin_float.hpp>

namespace holdfast::oracle {

using Real = boost::multiprecision::cpp_bin_float_50;

class Series {
 public:
  static constexpr int kOrder = 3;

  Series() = default;
  Series(const Real& constant) {
    at(0, 0) = constant;
  }                                                 // NOLINT(google-explicit-constructor): numbers are series
  Series(double constant) { at(0, 0) = constant; }  // NOLINT(google-explicit-constructor)

  static Series temperature(const Real& T) {
    Series s(T);
    s.at(1, 0) = 1;
    return s;
  }
  static Series density(const Real& rho) {
    Series s(rho);
    s.at(0, 1) = 1;
    return s;
  }

  Real& at(int i, int j) { return coefficient_[index(i, j)]; }
  const Real& at(int i, int j) const { return coefficient_[index(i, j)]; }
  const Real& value() const { return at(0, 0); }

  /// d/dT and d/drho as series; the highest order becomes zero and must not be used.
  Series byT() const {
    Series out;
    for (int i = 0; i < kOrder; ++i)
      for (int j = 0; i + j < kOrder; ++j) out.at(i, j) = (i + 1) * at(i + 1, j);
    return out;
  }
  Series byRho() const {
    Series out;
    for (int i = 0; i < kOrder; ++i)
      for (int j = 0; i + j < kOrder; ++j) out.at(i, j) = (j + 1) * at(i, j + 1);
    return out;
  }

  friend Series operator+(Series a, const Series& b) {
    for (std::size_t k = 0; k < a.coefficient_.size(); ++k) a.coefficient_[k] += b.coefficient_[k];
    return a;
  }
  friend Series operator-(Series a, const Series& b) {
    for (std::size_t k = 0; k < a.coefficient_.size(); ++k) a.coefficient_[k] -= b.coefficient_[k];
    return a;
  }
  friend Series operator-(const Series& a) { return Series() - a; }
  friend Series operator*(const Series& a, const Series& b) {
    Series out;
    for (int i = 0; i <= kOrder; ++i)
      for (int j = 0; i + j <= kOrder; ++j) {
        const Real& left = a.at(i, j);
        if (left == 0) continue;
        for (int k = 0; i + j + k <= kOrder; ++k)
          for (int l = 0; i + j + k + l <= kOrder; ++l) out.at(i + k, j + l) += left * b.at(k, l);
      }
    return out;
  }
  friend Series operator/(const Series& a, const Series& b) { return a * pow(b, Real(-1)); }

  /// sum_k taylor[k] w^k with w = s - s0: a function of one variable applied to a series.
  static Series compose(const Series& s, const std::array<Real, kOrder + 1>& taylor) {
    Series w = s;
    w.at(0, 0) = 0;
    Series out(taylor[kOrder]);
    for (int k = kOrder - 1; k >= 0; --k) out = out * w + Series(taylor[static_cast<std::size_t>(k)]);
    return out;
  }

  friend Series pow(const Series& s, const Real& exponent) {
    std::array<Real, kOrder + 1> taylor;
    const Real& s0 = s.value();
    if (s0 == 0) {  // only whole exponents make sense there
      for (int k = 0; k <= kOrder; ++k) taylor[static_cast<std::size_t>(k)] = exponent == k ? 1 : 0;
      return compose(s, taylor);
    }
    taylor[0] = boost::multiprecision::pow(s0, exponent);
    for (int k = 1; k <= kOrder; ++k)
      taylor[static_cast<std::size_t>(k)] =
          taylor[static_cast<std::size_t>(k - 1)] * (exponent - (k - 1)) / (k * s0);
    return compose(s, taylor);
  }
  friend Series exp(const Series& s) {
    std::array<Real, kOrder + 1> taylor;
    taylor[0] = boost::multiprecision::exp(s.value());
    for (int k = 1; k <= kOrder; ++k)
      taylor[static_cast<std::size_t>(k)] = taylor[static_cast<std::size_t>(k - 1)] / k;
    return compose(s, taylor);
  }
  friend Series log(const Series& s) {
    std::array<Real, kOrder + 1> taylor;
    taylor[0] = boost::multiprecision::log(s.value());
    Real power = 1;
    for (int k = 1; k <= kOrder; ++k) {
      power /= s.value();
      taylor[static_cast<std::size_t>(k)] = (k % 2 == 1 ? power : Real(-power)) / k;
    }
    return compose(s, taylor);
  }

 private:
  static constexpr std::size_t index(int i, int j) {
    return static_cast<std::size_t>((i + j) * (i + j + 1) / 2 + j);
  }
  std::array<Real, (kOrder + 1) * (kOrder + 2) / 2> coefficient_{};
};

}  // namespace holdfast::oracle
