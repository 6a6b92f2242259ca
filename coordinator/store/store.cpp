#include "coordinator/store/store.hpp"
