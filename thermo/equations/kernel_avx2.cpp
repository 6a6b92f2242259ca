// The kernels for avx2: their source is in the two bodies.
#define HOLDFAST_VARIANT avx2
#include "thermo/equations/ideal_body.hpp"
#include "thermo/equations/kernel_body.hpp"
