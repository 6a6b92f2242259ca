// Vectors of doubles and two elementary functions on them. Included once by each variant of the kernels,
// which defines HOLDFAST_VARIANT (a namespace name) and is compiled with the instruction set of that name.
//
// exp: error below 1 ulp for |x| <= 700; arguments below -708 give 0, above 708 give exp(708).
// log: error below 1 ulp for positive normal numbers (W. Kahan's and K. C. Ng's reduction, as in the freely
// distributable math library of Sun Microsystems, 1993). Both are one fixed sequence of operations on each
// lane: no lane's bits depend on another lane, nor on the width of the vector. With fused multiply-add (AVX2,
// AVX-512) the bits are the same for both; the plain x86-64 variant rounds twice and differs in the last
// place.
#pragma once

#include <immintrin.h>

#include <cstdint>
#include <cstring>

namespace holdfast::thermo::HOLDFAST_VARIANT {

#if defined(__AVX512F__)
inline constexpr int kWidth = 8;
#elif defined(__AVX2__)
inline constexpr int kWidth = 4;
#else
inline constexpr int kWidth = 2;
#endif

typedef double V __attribute__((vector_size(8 * kWidth)));
typedef std::int64_t I __attribute__((vector_size(8 * kWidth)));

inline V all(double x) {
  return x - V{};
}

inline V load(const double* from) {
  V out;
  std::memcpy(&out, from, sizeof out);
  return out;
}
inline void store(double* to, V value) {
  std::memcpy(to, &value, sizeof value);
}

/// a b + c, rounded once where the processor can.
inline V fma(V a, V b, V c) {
#if defined(__AVX512F__)
  return _mm512_fmadd_pd(a, b, c);
#elif defined(__AVX2__)
  return _mm256_fmadd_pd(a, b, c);
#else
  return a * b + c;
#endif
}
inline V fma(V a, double b, V c) {
  return fma(a, all(b), c);
}

inline V select(I mask, V yes, V no) {
  return mask ? yes : no;
}

/// True if the mask is set in every lane.
inline bool everywhere(I mask) {
  std::int64_t both = -1;
  for (int k = 0; k < kWidth; ++k) both &= mask[k];
  return both == -1;
}

inline V exp(V x) {
  constexpr double kLog2e = 1.4426950408889634;
  constexpr double kLn2High = 6.93147180369123816490e-01;
  constexpr double kLn2Low = 1.90821492927058770002e-10;
  constexpr double kMagic = 6755399441055744.0;  // 1.5 * 2^52: adding it rounds to a whole number
  const I tiny = x < all(-708.0);
  x = select(x > all(708.0), all(708.0), x);
  x = select(tiny, all(-708.0), x);
  const V shifted = x * kLog2e + kMagic;
  const V n = shifted - kMagic;
  V r = fma(n, -kLn2High, x);
  r = fma(n, -kLn2Low, r);
  // Taylor to degree 13 on |r| <= 0.347: the remainder is below 2^-57.
  V p = all(1.0 / 6227020800.0);
  p = fma(p, r, all(1.0 / 479001600.0));
  p = fma(p, r, all(1.0 / 39916800.0));
  p = fma(p, r, all(1.0 / 3628800.0));
  p = fma(p, r, all(1.0 / 362880.0));
  p = fma(p, r, all(1.0 / 40320.0));
  p = fma(p, r, all(1.0 / 5040.0));
  p = fma(p, r, all(1.0 / 720.0));
  p = fma(p, r, all(1.0 / 120.0));
  p = fma(p, r, all(1.0 / 24.0));
  p = fma(p, r, all(1.0 / 6.0));
  p = fma(p, r, all(0.5));
  p = fma(p, r * r, r) + 1.0;
  I bits;
  std::memcpy(&bits, &shifted, sizeof bits);
  I scaled;
  std::memcpy(&scaled, &p, sizeof scaled);
  scaled += bits << 52;
  V out;
  std::memcpy(&out, &scaled, sizeof out);
  return select(tiny, V{}, out);
}

inline V log(V x) {
  constexpr double kLn2High = 6.93147180369123816490e-01;
  constexpr double kLn2Low = 1.90821492927058770002e-10;
  I bits;
  std::memcpy(&bits, &x, sizeof bits);
  // m in [sqrt(1/2), sqrt 2), x = 2^k m
  const I offset = bits - 0x3fe6a09e667f3bcdLL;
  const I k = offset >> 52;
  bits -= k << 52;
  V m;
  std::memcpy(&m, &bits, sizeof m);
  const V f = m - 1.0;
  const V s = f / (f + 2.0);
  const V z = s * s;
  V R = all(1.479819860511658591e-01);
  R = fma(R, z, all(1.531383769920937332e-01));
  R = fma(R, z, all(1.818357216161805012e-01));
  R = fma(R, z, all(2.222219843214978396e-01));
  R = fma(R, z, all(2.857142874366239149e-01));
  R = fma(R, z, all(3.999999999940941908e-01));
  R = fma(R, z, all(6.666666666666735130e-01));
  R = R * z;
  const V half = f * f * 0.5;
  const V n = __builtin_convertvector(k, V);
  return n * kLn2High - ((half - fma(s, half + R, n * kLn2Low)) - f);
}

}  // namespace holdfast::thermo::HOLDFAST_VARIANT
