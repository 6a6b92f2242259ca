// Landing: rows of whole jobs and their committed marks, one transaction.
#include <algorithm>
#include <bit>
#include <map>
#include <string>
#include <utility>

#include "coordinator/store/store_impl.hpp"

namespace holdfast::coordinator {
namespace {

static_assert(std::endian::native == std::endian::little,
              "axis values go into an image as they stand in memory");

struct LandingGroup {
  std::int64_t study = 0;
  LandingStudy* landing = nullptr;
  std::vector<const FinishedJob*> jobs;  ///< in order of their points
};

/// An image attached under a name of its own, readable as long as the object lives.
class AttachedImage {
 public:
  AttachedImage(Connection& connection, std::size_t number, std::span<char> image)
      : connection_(connection), name_("image" + std::to_string(number)) {
    connection_.execute("ATTACH ':memory:' AS " + name_);
    const auto size = static_cast<sqlite3_int64>(image.size());
    const int code = sqlite3_deserialize(connection_.handle(), name_.c_str(),
                                         reinterpret_cast<unsigned char*>(image.data()), size, size,
                                         SQLITE_DESERIALIZE_READONLY);
    if (code != SQLITE_OK) {
      const SqliteFailure failure = failureOf(connection_.handle());
      detach();
      throw failure;
    }
  }
  ~AttachedImage() { detach(); }
  AttachedImage(const AttachedImage&) = delete;
  AttachedImage& operator=(const AttachedImage&) = delete;

  const std::string& name() const { return name_; }

 private:
  void detach() {
    sqlite3_exec(connection_.handle(), ("DETACH " + name_).c_str(), nullptr, nullptr, nullptr);
  }
  Connection& connection_;
  std::string name_;
};

/// Writes the rows of one job into its study's image.
void appendJob(LandingStudy& study, const v1::JobResult& result) {
  const std::size_t points = result.points();
  std::vector<std::int64_t> composition;
  composition.reserve(points);
  for (const plan::Run& run : study.points.runs(result.first_point(), points))
    composition.insert(composition.end(), run.points, static_cast<std::int64_t>(run.composition));

  std::vector<double> axes(static_cast<std::size_t>(study.plan.axes_size()) * points);
  std::vector<RealColumn> reals;
  reals.reserve(study.table.stored().size());
  for (const StoredColumn& column : study.table.stored()) {
    if (column.source == StoredColumn::Source::axis) {
      double* values = axes.data() + static_cast<std::size_t>(column.index) * points;
      study.points.axisValues(column.index, result.first_point(), points, values);
      reals.push_back({reinterpret_cast<const char*>(values), nullptr});
    } else {
      const v1::ColumnData& data = result.columns(column.index);
      reals.push_back({data.values().data(), data.presence().empty() ? nullptr : data.presence().data()});
    }
  }
  study.image.append({result.first_point(), composition, result.phase(), result.outcome(), reals});
}

/// Builds the image of a group's rows.
Result<std::span<char>> imageOf(LandingGroup& group) {
  LandingStudy& study = *group.landing;
  const std::size_t reals = study.table.stored().size();
  std::size_t rows = 0;
  for (const FinishedJob* job : group.jobs) rows += job->result->points();
  if (RecordImage::mostBytes(rows, reals) > RecordImage::kMostBytes)
    return Error{"too many rows to land at once: " + std::to_string(rows)};
  study.image.begin(study.table.createImageTable(), reals);
  for (const FinishedJob* job : group.jobs) appendJob(study, *job->result);
  return study.image.finish();
}

/// Marks a group's jobs committed. Fails if one of them is not waiting with just these points.
Status commitInLedger(Connection& connection, const LandingGroup& group) {
  Statement update(connection.handle(),
                   "UPDATE job SET state = 'committed', worker = ?, attempts = ?, failure = NULL, "
                   "started_utc = strftime('%Y-%m-%dT%H:%M:%fZ', ?, 'unixepoch'), "
                   "finished_utc = strftime('%Y-%m-%dT%H:%M:%fZ', ?, 'unixepoch') "
                   "WHERE study = ? AND id = ? AND first_point = ? AND points = ? AND state = 'waiting'");
  for (const FinishedJob* job : group.jobs) {
    update.bind(1, job->worker).bind(2, std::int64_t{job->attempts});
    update.bind(3, job->started_unix).bind(4, job->finished_unix).bind(5, group.study);
    update.bind(6, static_cast<std::int64_t>(job->result->job()));
    update.bind(7, static_cast<std::int64_t>(job->result->first_point()));
    update.bind(8, std::int64_t{job->result->points()}).run();
    if (connection.changes() != 1)
      return Error{"job " + std::to_string(job->result->job()) + " of study \"" + group.landing->plan.name() +
                   "\" does not land: the ledger has no waiting job of this number and these points"};
  }
  return success();
}

void insertAbsences(Connection& connection, const LandingGroup& group) {
  Statement insert(connection.handle(), "INSERT OR IGNORE INTO absence VALUES (?, ?, ?, ?, ?)");
  const std::vector<StoredColumn>& stored = group.landing->table.stored();
  for (const FinishedJob* job : group.jobs)
    for (const v1::AbsentColumn& absent : job->result->absences()) {
      const auto column = std::ranges::find_if(stored, [&](const StoredColumn& candidate) {
        return candidate.source == StoredColumn::Source::collected &&
               candidate.index == static_cast<int>(absent.column());
      });
      if (column == stored.end()) continue;  // stored as an axis: never absent
      insert.bind(1, group.study).bind(2, std::int64_t{absent.candidate()});
      insert.bind(3, std::int64_t{absent.phase()}).bind(4, column->name).bind(5, absent.reason()).run();
    }
}

}  // namespace

Status Store::land(std::span<const FinishedJob> jobs) {
  return guarded([&] { return impl_->landGrouped(jobs); });
}

Status Store::Impl::landGrouped(std::span<const FinishedJob> jobs) {
  std::map<std::int64_t, LandingGroup> by_study;
  for (const FinishedJob& job : jobs) {
    LandingGroup& group = by_study[job.study];
    if (group.landing == nullptr) {
      auto landing_study = landing(job.study);
      if (!landing_study) return landing_study.error();
      group.study = job.study;
      group.landing = *landing_study;
    }
    if (Status fits = checkResult(group.landing->plan, *job.result); !fits) return fits;
    group.jobs.push_back(&job);
  }
  if (by_study.empty()) return success();
  if (by_study.size() > kMostStudiesOfLanding)
    return Error{"jobs of more than " + std::to_string(kMostStudiesOfLanding) +
                 " studies cannot land at once"};

  std::vector<std::unique_ptr<AttachedImage>> images;  // detached after the transaction has ended
  {
    // Attached inside it: BEGIN IMMEDIATE would ask every attached database for its write lock.
    Transaction transaction(connection);
    for (auto& [study, group] : by_study) {
      if (Status ledger = commitInLedger(connection, group); !ledger) return ledger;
      std::ranges::sort(group.jobs, {}, [](const FinishedJob* job) { return job->result->first_point(); });
      auto image = imageOf(group);
      if (!image) return image.error();
      images.push_back(std::make_unique<AttachedImage>(connection, images.size(), *image));
      // Nothing but SELECT * between tables of equal columns: SQLite copies the records undecoded.
      connection.execute("INSERT INTO main." + named(group.landing->table.name()) + " SELECT * FROM " +
                         images.back()->name() + ".rows");
      insertAbsences(connection, group);
    }
    transaction.commit();
  }
  images.clear();
  keepLogBounded();
  return success();
}

}  // namespace holdfast::coordinator
