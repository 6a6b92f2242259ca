#include "proto/points.hpp"
