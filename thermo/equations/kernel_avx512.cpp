// The kernels for avx512: their source is in the two bodies.
#define HOLDFAST_VARIANT avx512
#include "thermo/equations/ideal_body.hpp"
#include "thermo/equations/kernel_body.hpp"
