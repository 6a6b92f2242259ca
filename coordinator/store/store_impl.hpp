// What a Store holds. Included by the sources of Store alone.
#pragma once

#include <cstdint>
#include <map>
#include <memory>
#include <string>

#include "coordinator/store/checkpointer.hpp"
#include "coordinator/store/place.hpp"
#include "coordinator/store/points_table.hpp"
#include "coordinator/store/record_image.hpp"
#include "coordinator/store/sqlite.hpp"
#include "coordinator/store/store.hpp"
#include "proto/points.hpp"

namespace holdfast::coordinator {

/// A study whose jobs land: its plan, numbering and table, read once.
struct LandingStudy {
  LandingStudy(v1::Plan kept, PointsTable made)
      : plan(std::move(kept)), points(plan), table(std::move(made)) {}
  LandingStudy(const LandingStudy&) = delete;
  LandingStudy& operator=(const LandingStudy&) = delete;

  v1::Plan plan;
  plan::Points points;
  PointsTable table;
  RecordImage image;  ///< keeps its memory between landings
};

struct Store::Impl {
  Impl(const std::filesystem::path& file, StoreLock taken)
      : lock(std::move(taken)), connection(file), checkpointer(file) {}

  /// Pragmas, schema, version. Fails if the file is not a store.
  Status prepare(const std::filesystem::path& file);
  /// The study of this number, read from the store if it has not been yet.
  Result<LandingStudy*> landing(std::int64_t study);
  Status landGrouped(std::span<const FinishedJob> jobs);
  /// Moves the write-ahead log into the file when it has grown: after every commit of many pages.
  void keepLogBounded();

  StoreLock lock;  // let go after the connection is closed
  Connection connection;
  Checkpointer checkpointer;  // ends before the connection: the last one to close moves what is left
  std::map<std::int64_t, std::unique_ptr<LandingStudy>> studies;
  std::uint64_t openings = 0;
  int log_pages = 0;    ///< in the write-ahead log after the last commit
  int woken_at = 0;     ///< pages when the checkpointer was last woken
  int forced_from = 0;  ///< pages from which readers are waited for
};

}  // namespace holdfast::coordinator
