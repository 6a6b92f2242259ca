// The kernels for baseline: their source is in the two bodies.
#define HOLDFAST_VARIANT baseline
#include "thermo/equations/ideal_body.hpp"
#include "thermo/equations/kernel_body.hpp"
