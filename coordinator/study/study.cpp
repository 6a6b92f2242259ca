#include "coordinator/study/study.hpp"
