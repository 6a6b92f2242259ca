// What the tests of the store share: a place of its own for each, small plans, results with values that can
// be told from their point.
#pragma once

#include <gtest/gtest.h>
#include <unistd.h>

#include <algorithm>
#include <cstring>
#include <filesystem>
#include <string>
#include <vector>

#include "coordinator/store/sqlite.hpp"
#include "coordinator/store/store.hpp"
#include "proto/points.hpp"
#include "thermo/state.hpp"

namespace holdfast::coordinator {

/// The project's fluid data, loaded once.
inline const thermo::FluidLibrary& library() {
  static const auto loaded =
      thermo::FluidLibrary::load(std::string(HOLDFAST_SOURCE_DIR) + "/thermo/fluids/data");
  return loaded.value();
}

/// A folder that goes with the object.
class Folder {
 public:
  Folder() {
    std::string pattern = (std::filesystem::temp_directory_path() / "holdfast-store-XXXXXX").string();
    path_ = mkdtemp(pattern.data());
  }
  ~Folder() {
    std::error_code ignored;
    std::filesystem::remove_all(path_, ignored);
  }
  Folder(const Folder&) = delete;
  Folder& operator=(const Folder&) = delete;
  std::filesystem::path operator/(const std::string& name) const { return path_ / name; }

 private:
  std::filesystem::path path_;
};

/// Propane, and a lattice of propane and isobutane in quarters: 1 + 5 compositions, each over `temperatures`
/// x 3 pressures. Molar masses of no particular precision.
inline v1::Plan planOf(const std::string& name, int temperatures, std::uint32_t points_per_job,
                       const std::vector<std::string>& columns = {"rho", "h", "s", "(dh/dp)_T"}) {
  v1::Plan plan;
  plan.set_name(name);
  plan.set_title("A title with a 'quote'");
  plan.set_basis(v1::BASIS_MASS);
  v1::PlannedCandidate* pure = plan.add_candidates();
  pure->set_label("R-290");
  pure->set_equation("reference");
  pure->add_components("R-290");
  pure->add_molar_mass(0.0441);
  pure->mutable_fixed()->add_mole_fraction(1);
  v1::PlannedCandidate* blend = plan.add_candidates();
  blend->set_label("R-290/R-600a");
  blend->set_equation("peng-robinson");
  for (const char* component : {"R-290", "R-600a"}) blend->add_components(component);
  for (const double M : {0.0441, 0.0581}) blend->add_molar_mass(M);
  blend->mutable_lattice()->set_steps(4);
  v1::PlannedAxis* T = plan.add_axes();
  T->set_quantity("T");
  for (int i = 0; i < temperatures; ++i) T->add_values(250 + 0.25 * i);
  v1::PlannedAxis* p = plan.add_axes();
  p->set_quantity("p");
  for (const double value : {1e5, 5e5, 20e5}) p->add_values(value);
  for (const std::string& column : columns) plan.add_columns(column);
  plan.set_points(static_cast<std::uint64_t>(temperatures) * 3 * 6);
  plan.set_points_per_job(points_per_job);
  return plan;
}

inline std::vector<CandidateFacts> factsOf(const v1::Plan& plan) {
  std::vector<CandidateFacts> facts;
  for (const v1::PlannedCandidate& candidate : plan.candidates()) {
    CandidateFacts known;
    known.data_kind = candidate.components_size() == 1 ? "pure" : "published";
    known.reference_used.assign(static_cast<std::size_t>(candidate.components_size()),
                                {"saturated liquid", 273.15, 200e3, 1e3});
    facts.push_back(known);
  }
  return facts;
}

/// The value that column c has at a point in these tests.
inline double valueAt(std::uint64_t point, int c) {
  return static_cast<double>(point) + 0.001 * (c + 1);
}

/// Whether it is there in these tests: every point whose number is a multiple of 7 + c lacks it.
inline bool presentAt(std::uint64_t point, int c) {
  return point % (7 + static_cast<std::uint64_t>(c)) != 0;
}

inline v1::JobResult resultOf(const v1::Plan& plan, const JobRecord& job) {
  v1::JobResult result;
  result.set_job(job.id);
  result.set_first_point(job.first_point);
  result.set_points(job.points);
  for (std::uint32_t k = 0; k < job.points; ++k) {
    const std::uint64_t point = job.first_point + k;
    result.mutable_phase()->push_back(static_cast<char>(point % 5));
    result.mutable_outcome()->push_back(static_cast<char>(point % 2));
  }
  for (int c = 0; c < plan.columns_size(); ++c) {
    v1::ColumnData* column = result.add_columns();
    std::vector<double> values(job.points);
    std::string presence((job.points + 7) / 8, '\0');
    for (std::uint32_t k = 0; k < job.points; ++k) {
      values[k] = valueAt(job.first_point + k, c);
      if (presentAt(job.first_point + k, c))
        presence[k / 8] = static_cast<char>(static_cast<unsigned char>(presence[k / 8]) | 1U << (k % 8));
    }
    column->set_values(values.data(), values.size() * sizeof(double));
    column->set_presence(presence);
  }
  return result;
}

inline FinishedJob finished(std::int64_t study, const v1::JobResult& result) {
  return {study, &result, "host:1", 0, 1'700'000'000.25, 1'700'000'001.5};
}

/// Opens a store that must open, adds a study that must be accepted.
inline Store openStore(const std::filesystem::path& file) {
  auto store = Store::open(file);
  EXPECT_TRUE(store.ok()) << (store.ok() ? "" : store.error().message);
  return std::move(*store);
}

inline StudyRecord addStudy(Store& store, const v1::Plan& plan) {
  auto record = store.add(plan, "identity", "text of the study", "0.1.0", library(), factsOf(plan));
  EXPECT_TRUE(record.ok()) << (record.ok() ? "" : record.error().message);
  return record.ok() ? *record : StudyRecord{};
}

inline void expectSuccess(const Status& status) {
  EXPECT_TRUE(status.ok()) << (status.ok() ? "" : status.error().message);
}

inline std::string messageOf(const Status& status) {
  return status.ok() ? "" : status.error().message;
}

inline std::vector<JobRecord> jobsOf(Store& store, const StudyRecord& study) {
  auto jobs = store.jobs(study.id);
  EXPECT_TRUE(jobs.ok()) << (jobs.ok() ? "" : jobs.error().message);
  return jobs.ok() ? *jobs : std::vector<JobRecord>();
}

inline std::vector<StudyRecord> studiesOf(Store& store) {
  auto studies = store.studies();
  EXPECT_TRUE(studies.ok()) << (studies.ok() ? "" : studies.error().message);
  return studies.ok() ? *studies : std::vector<StudyRecord>();
}

/// Lands every job that waits, `at_once` a transaction.
inline void landAll(Store& store, const StudyRecord& study, std::size_t at_once = 3) {
  std::vector<JobRecord> waiting;
  for (const JobRecord& job : jobsOf(store, study))
    if (job.state == JobState::waiting) waiting.push_back(job);
  for (std::size_t first = 0; first < waiting.size(); first += at_once) {
    std::vector<v1::JobResult> results;
    for (std::size_t i = first; i < std::min(first + at_once, waiting.size()); ++i)
      results.push_back(resultOf(study.plan, waiting[i]));
    std::vector<FinishedJob> jobs;
    jobs.reserve(results.size());
    for (const v1::JobResult& result : results) jobs.push_back(finished(study.id, result));
    expectSuccess(store.land(jobs));
  }
}

/// The answer to a question, rows by newlines and columns by '|', as the sqlite3 shell prints it.
inline std::string ask(Connection& connection, const std::string& question) {
  std::string answer;
  Statement statement(connection.handle(), question);
  const int columns = statement.columns();
  while (statement.row()) {
    if (!answer.empty()) answer += '\n';
    for (int c = 0; c < columns; ++c) {
      if (c > 0) answer += '|';
      answer += statement.text(c);
    }
  }
  return answer;
}

inline std::string ask(const std::filesystem::path& file, const std::string& question) {
  Connection connection(file);
  return ask(connection, question);
}

}  // namespace holdfast::coordinator
