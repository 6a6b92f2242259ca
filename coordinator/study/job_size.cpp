#include "coordinator/study/job_size.hpp"

#include <algorithm>

#include "thermo/tile.hpp"

namespace holdfast::coordinator {

std::uint32_t pointsPerJob(std::uint64_t points, std::uint64_t columns) {
  constexpr std::uint64_t kBits = std::uint64_t{8} * 4 * 1024 * 1024;  // 4 MiB
  constexpr std::uint64_t kTiles = 512;                                // 32768 points
  constexpr std::uint64_t kShares = 256;
  constexpr std::uint64_t kTile = thermo::kTile;
  const std::uint64_t bits_per_point = columns * (64 + 1) + 16;
  const std::uint64_t tiles_of_size = kBits / bits_per_point / kTile;
  const std::uint64_t tiles_of_share = (points / kShares + kTile - 1) / kTile;
  const std::uint64_t tiles = std::max<std::uint64_t>(1, std::min({tiles_of_size, kTiles, tiles_of_share}));
  return static_cast<std::uint32_t>(tiles * kTile);
}

}  // namespace holdfast::coordinator
