#include "coordinator/study/estimate.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <cstdio>

#include "coordinator/study/wording.hpp"
#include "proto/points.hpp"

namespace holdfast::coordinator {
namespace {

// Core seconds of one state, solve included, on a processor of about 2020; a cubic blend has its stability
// test, which grows with the components.
constexpr double kReferenceState = 3e-6;
constexpr double kCubicState = 2e-6;
constexpr double kBlendComponent = 6e-6;
// Core seconds of one column of one row: computed; then carried, written as a record and landed.
constexpr double kComputedColumn = 25e-9;
constexpr double kLandedColumn = 35e-9;
constexpr double kStart = 0.3;  // s: reading the fluids, building the candidates, opening the store

/// Bytes of an integer in a record (SQLite's file format, "Record Format": serial types 1 to 6).
std::uint64_t integerBytes(std::uint64_t largest) {
  constexpr std::array<std::uint64_t, 5> kSizes = {1, 2, 3, 4, 6};
  for (const std::uint64_t bytes : kSizes)
    if (largest < std::uint64_t{1} << (8 * bytes - 1)) return bytes;
  return 8;
}

/// Bytes of an unsigned number in SQLite's variable-length form, 7 bits a byte.
std::uint64_t varintBytes(std::uint64_t number) {
  std::uint64_t bytes = 1;
  while (number >= 0x80 && bytes < 9) {
    number >>= 7U;
    ++bytes;
  }
  return bytes;
}

/// Bytes of the points table: leaf pages of 32 KiB, each with 8 bytes of header and 2 bytes a cell. The point
/// is the key: in the record it takes no room.
double tableBytes(const v1::Plan& plan, std::uint64_t compositions) {
  constexpr std::uint64_t kPage = 32768, kPageHeader = 8, kCellPointer = 2;
  const auto reals =
      static_cast<std::uint64_t>(plan.axes_size()) + static_cast<std::uint64_t>(plan.columns_size());
  const std::uint64_t integers = 4;  // point, composition, phase, outcome: a byte of type each
  const std::uint64_t header = integers + reals + varintBytes(integers + reals + 1);
  const std::uint64_t payload = header + integerBytes(compositions) + 2 + 8 * reals;
  const std::uint64_t cell = varintBytes(payload) + varintBytes(plan.points()) + payload + kCellPointer;
  const std::uint64_t rows_of_page = std::max<std::uint64_t>(1, (kPage - kPageHeader) / cell);
  return std::ceil(static_cast<double>(plan.points()) / static_cast<double>(rows_of_page)) * kPage;
}

double stateSeconds(const v1::PlannedCandidate& candidate) {
  if (candidate.components_size() > 1) return kCubicState + kBlendComponent * candidate.components_size();
  return candidate.equation() == "reference" ? kReferenceState : kCubicState;
}

std::string rounded(double value) {
  std::array<char, 32> text{};
  if (value < 100)
    std::snprintf(text.data(), text.size(), "%.2g", value);
  else
    return grouped(static_cast<std::uint64_t>(value));
  return text.data();
}

std::string bytesInWords(double bytes) {
  if (bytes < 1e6) return rounded(std::ceil(bytes / 1e3)) + " kB";
  return bytes < 1e9 ? rounded(bytes / 1e6) + " MB" : rounded(bytes / 1e9) + " GB";
}

std::string timeInWords(double seconds) {
  if (seconds < 120) return rounded(seconds) + " s";
  return seconds < 7200 ? rounded(seconds / 60) + " min" : rounded(seconds / 3600) + " h";
}

}  // namespace

Estimate estimate(const v1::Plan& plan, unsigned threads) {
  const plan::Points points(plan);
  Estimate estimate;
  estimate.rows = plan.points();
  if (plan.points_per_job() > 0)
    estimate.jobs = (plan.points() + plan.points_per_job() - 1) / plan.points_per_job();
  estimate.bytes = tableBytes(plan, points.compositions());
  double core_seconds =
      static_cast<double>(plan.points()) * plan.columns_size() * (kComputedColumn + kLandedColumn);
  for (int i = 0; i < plan.candidates_size(); ++i)
    core_seconds += static_cast<double>(points.compositionsOf(static_cast<std::uint32_t>(i))) *
                    static_cast<double>(points.perComposition()) * stateSeconds(plan.candidates(i));
  // However many threads compute, one file takes the rows in one after the other.
  const double landing = static_cast<double>(plan.points()) * plan.columns_size() * kLandedColumn;
  estimate.seconds = kStart + std::max(core_seconds / std::max(1U, threads), landing);
  return estimate;
}

std::string render(const Estimate& estimate, unsigned threads) {
  return grouped(estimate.rows) + " rows in " + grouped(estimate.jobs) + " jobs, about " +
         bytesInWords(estimate.bytes) + ", about " + timeInWords(estimate.seconds) + " on " +
         std::to_string(threads) + (threads == 1 ? " thread" : " threads");
}

}  // namespace holdfast::coordinator
