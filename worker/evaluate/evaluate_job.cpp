#include "worker/evaluate/evaluate_job.hpp"
