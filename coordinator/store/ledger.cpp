// The ledger of jobs and the states of studies.
#include <string>
#include <utility>

#include "coordinator/store/store_impl.hpp"
#include "thermo/state.hpp"

namespace holdfast::coordinator {
namespace {

/// The states that the ledger knows: what was leased or returned when a program ended waits again.
JobState jobStateOf(std::string_view name) {
  if (name == nameOf(JobState::committed)) return JobState::committed;
  return name == nameOf(JobState::failed) ? JobState::failed : JobState::waiting;
}

}  // namespace

Result<std::vector<JobRecord>> Store::jobs(std::int64_t study) {
  return guarded([&]() -> Result<std::vector<JobRecord>> {
    std::vector<JobRecord> records;
    Statement select(impl_->connection.handle(),
                     "SELECT id, first_point, points, state, attempts, coalesce(failure, '') FROM job "
                     "WHERE study = ? ORDER BY first_point");
    select.bind(1, study);
    while (select.row())
      records.push_back({static_cast<std::uint64_t>(select.integer(0)),
                         static_cast<std::uint64_t>(select.integer(1)),
                         static_cast<std::uint32_t>(select.integer(2)), jobStateOf(select.text(3)),
                         static_cast<std::uint32_t>(select.integer(4)), select.text(5)});
    return records;
  });
}

Status Store::setState(std::int64_t study, StudyState state) {
  return guarded([&]() -> Status {
    Connection& connection = impl_->connection;
    Statement update(connection.handle(), "UPDATE study SET state = ? WHERE id = ?");
    update.bind(1, nameOf(state)).bind(2, study).run();
    if (connection.changes() != 1) return Error{"the store has no study of number " + std::to_string(study)};
    // A study that no longer runs leaves the file whole: it can be copied alone. Readers that are at work
    // keep the log; it goes when the store is closed.
    if (state == StudyState::running) return success();
    const auto alone = impl_->checkpointer.holdOff();
    sqlite3_wal_checkpoint_v2(connection.handle(), "main", SQLITE_CHECKPOINT_TRUNCATE, nullptr, nullptr);
    return success();
  });
}

Status Store::fail(std::int64_t study, const JobRecord& job) {
  return guarded([&]() -> Status {
    Statement update(impl_->connection.handle(),
                     "UPDATE job SET state = 'failed', attempts = ?, failure = ? "
                     "WHERE study = ? AND id = ? AND state <> 'committed'");
    update.bind(1, std::int64_t{job.attempts}).bind(2, job.failure).bind(3, study);
    update.bind(4, static_cast<std::int64_t>(job.id)).run();
    if (impl_->connection.changes() != 1)
      return Error{"job " + std::to_string(job.id) + " cannot fail: it is committed or not in the ledger"};
    return success();
  });
}

Status Store::replaceJob(std::int64_t study, std::uint64_t job, std::span<const JobRecord> parts) {
  return guarded([&]() -> Status {
    Connection& connection = impl_->connection;
    Transaction transaction(connection);
    Statement find(connection.handle(),
                   "SELECT first_point, points FROM job WHERE study = ? AND id = ? AND state = 'waiting'");
    if (!find.bind(1, study).bind(2, static_cast<std::int64_t>(job)).row())
      return Error{"job " + std::to_string(job) + " cannot be replaced: it is not waiting"};
    auto next = static_cast<std::uint64_t>(find.integer(0));
    const std::uint64_t end = next + static_cast<std::uint64_t>(find.integer(1));
    find.row();
    for (const JobRecord& part : parts) {
      if (part.first_point != next || part.points == 0) break;
      next += part.points;
    }
    if (next != end)
      return Error{"job " + std::to_string(job) + " cannot be replaced: its parts do not cover its points"};
    Statement remove(connection.handle(), "DELETE FROM job WHERE study = ? AND id = ?");
    remove.bind(1, study).bind(2, static_cast<std::int64_t>(job)).run();
    Statement insert(connection.handle(),
                     "INSERT INTO job(study, id, first_point, points, state, attempts) "
                     "VALUES (?, ?, ?, ?, 'waiting', ?)");
    for (const JobRecord& part : parts) {
      insert.bind(1, study).bind(2, static_cast<std::int64_t>(part.id));
      insert.bind(3, static_cast<std::int64_t>(part.first_point)).bind(4, std::int64_t{part.points});
      insert.bind(5, std::int64_t{part.attempts}).run();
    }
    transaction.commit();
    return success();
  });
}

Status Store::landCrashed(std::int64_t study, const JobRecord& job, std::string_view worker) {
  return guarded([&]() -> Status {
    auto landing = impl_->landing(study);
    if (!landing) return landing.error();
    v1::JobResult result;
    result.set_job(job.id);
    result.set_first_point(job.first_point);
    result.set_points(job.points);
    result.set_phase(std::string(job.points, '\0'));
    result.set_outcome(std::string(job.points, static_cast<char>(thermo::Outcome::crashed)));
    for (int c = 0; c < (*landing)->plan.columns_size(); ++c) {
      v1::ColumnData* column = result.add_columns();
      column->set_values(std::string(job.points * sizeof(double), '\0'));
      column->set_presence(std::string((job.points + 7) / 8, '\0'));
    }
    FinishedJob finished;
    finished.study = study;
    finished.result = &result;
    finished.worker = worker;
    finished.attempts = job.attempts;
    return impl_->landGrouped({&finished, 1});
  });
}

}  // namespace holdfast::coordinator
