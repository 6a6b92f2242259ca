// The shape of a batch. Everything in thermo/ works on a tile: up to 64 states side by side, one lane a
// state, one row a number of every state (structure of arrays). One state is a tile of one lane.
#pragma once

#include <array>
#include <cstddef>

namespace holdfast::thermo {

/// States in a full tile. A sweep is cut into tiles by point number; a solve may start from a neighbour only
/// inside one.
inline constexpr int kTile = 64;

/// Lanes the kernels work on together. Rows are valid (finite, harmless) up to the next multiple of it:
/// fill() below.
inline constexpr int kLanes = 8;

/// Most components of a blend.
inline constexpr int kMostComponents = 8;

/// One number of every state of a tile. 64-byte aligned, so that a kernel may load whole vectors.
struct alignas(64) Row {
  std::array<double, kTile> lane;

  double& operator[](int k) { return lane[static_cast<std::size_t>(k)]; }
  double operator[](int k) const { return lane[static_cast<std::size_t>(k)]; }
  double* data() { return lane.data(); }
  const double* data() const { return lane.data(); }

  /// Copies lane count-1 into the lanes from count to the next multiple of kLanes (0 < count <= kTile), so
  /// that a kernel that works on whole vectors computes nothing but repetitions there.
  void fill(int count) {
    for (int k = count; k % kLanes != 0; ++k) (*this)[k] = (*this)[count - 1];
  }
};

/// The number of lanes that a kernel touches for `count` states: the next multiple of kLanes.
constexpr int paddedLanes(int count) {
  return (count + kLanes - 1) / kLanes * kLanes;
}

}  // namespace holdfast::thermo
