#include "thermo/jet/gradients.hpp"
