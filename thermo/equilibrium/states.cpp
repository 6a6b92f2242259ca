#include "thermo/equilibrium/states.hpp"
