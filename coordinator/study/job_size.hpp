// How a study is cut into jobs.
#pragma once

#include <cstdint>

namespace holdfast::coordinator {

/// Points of a job: whole tiles of 64, sized from the study alone so that every machine cuts it alike. The
/// least of
///   - 4 MiB of columns, at 8 bytes a column, a bit a column, and 2 bytes a point (phase and outcome);
///   - 32768 points: about a second of one core where a point costs 30 us (blends by a cubic, with their
///     stability test);
///   - a 256th of the study, so that many workers can share a small one;
/// but at least one tile.
std::uint32_t pointsPerJob(std::uint64_t points, std::uint64_t columns);

}  // namespace holdfast::coordinator
