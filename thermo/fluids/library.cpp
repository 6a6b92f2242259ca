#include "thermo/fluids/library.hpp"
