#include "thermo/evaluator.hpp"
