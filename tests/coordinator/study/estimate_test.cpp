// Estimates against hand calculations by SQLite's published file format, and against plain sense.
#include "coordinator/study/estimate.hpp"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

namespace holdfast::coordinator {
namespace {

v1::Plan sweep(int T_values, int p_values, int columns) {
  v1::Plan plan;
  auto& candidate = *plan.add_candidates();
  candidate.set_equation("reference");
  candidate.add_components("R-290");
  candidate.mutable_fixed()->add_mole_fraction(1);
  auto& T = *plan.add_axes();
  for (int i = 0; i < T_values; ++i) T.add_values(300 + i);
  auto& p = *plan.add_axes();
  for (int i = 0; i < p_values; ++i) p.add_values(1e5 * (i + 1));
  for (int i = 0; i < columns; ++i) plan.add_columns("rho");
  plan.set_points(static_cast<std::uint64_t>(T_values) * static_cast<std::uint64_t>(p_values));
  plan.set_points_per_job(64);
  return plan;
}

TEST(Estimate, CountsRowsAndJobs) {
  const Estimate cost = estimate(sweep(10, 13, 3), 2);
  EXPECT_EQ(cost.rows, 130u);
  EXPECT_EQ(cost.jobs, 3u);
}

TEST(Estimate, OfBytesFollowsSQLitesRecordFormat) {
  // 10 000 rows of 2 + 30 REAL: header 1 + 4 + 32 bytes; data 0 (the key) + 1 (composition) + 1 + 1 + 256;
  // the cell has 2 bytes of payload length, 2 of rowid and 2 of pointer: 302 bytes, 108 to a page of 32768
  // with its header of 8.
  EXPECT_EQ(estimate(sweep(100, 100, 30), 1).bytes, 93.0 * 32768);
}

TEST(Estimate, GrowsWithPointsAndColumnsAndShrinksWithThreads) {
  const Estimate small = estimate(sweep(100, 100, 10), 2);
  EXPECT_GT(estimate(sweep(200, 100, 10), 2).bytes, 1.9 * small.bytes);
  EXPECT_GT(estimate(sweep(200, 100, 10), 2).seconds, small.seconds);
  EXPECT_GT(estimate(sweep(100, 100, 20), 2).seconds, small.seconds);
  EXPECT_LT(estimate(sweep(1000, 1000, 10), 4).seconds, estimate(sweep(1000, 1000, 10), 2).seconds);
}

TEST(Estimate, IsNeverFasterThanOneFileTakesRows) {
  // A store that takes 30 columns at a million rows a second needs a second for a million rows, whatever the
  // threads.
  EXPECT_GT(estimate(sweep(1000, 1000, 30), 4096).seconds, 1.0);
}

TEST(Estimate, ReadsAsALine) {
  EXPECT_EQ(render({.rows = 19881, .jobs = 156, .bytes = 2.94e6, .seconds = 0.214}, 2),
            "19 881 rows in 156 jobs, about 2.9 MB, about 0.21 s on 2 threads");
  EXPECT_EQ(render({.rows = 1'000'000'000, .jobs = 30'518, .bytes = 152e9, .seconds = 9000}, 1),
            "1 000 000 000 rows in 30 518 jobs, about 152 GB, about 2.5 h on 1 thread");
}

}  // namespace
}  // namespace holdfast::coordinator
