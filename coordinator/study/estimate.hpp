// What a study will cost, before it is run.
#pragma once

#include <cstdint>
#include <string>

#include "holdfast.pb.h"

namespace holdfast::coordinator {

/// For `holdfast run --dry-run`.
struct Estimate {
  std::uint64_t rows = 0;
  std::uint64_t jobs = 0;
  double bytes = 0;    ///< of the points table, from the record format of SQLite
  double seconds = 0;  ///< with `threads` workers' threads on this machine; good to a factor of three or so
};

/// Bytes: every row has its numbers (a NULL takes none, so that a study with many absent values stays below).
/// Time: a state costs 2 to 10 us of one core and more with every component of a blend, a column 25 ns to
/// compute and 35 ns to land.
Estimate estimate(const v1::Plan& plan, unsigned threads);

/// One line for people: "19 881 rows in 156 jobs, about 2.9 MB, about 0.2 s on 2 threads".
std::string render(const Estimate& estimate, unsigned threads);

}  // namespace holdfast::coordinator
