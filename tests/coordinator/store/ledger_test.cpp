// The ledger: which jobs there are, and what may become of them.
#include <gmock/gmock.h>

#include "tests/coordinator/store/store_support.hpp"

namespace holdfast::coordinator {
namespace {

using testing::HasSubstr;

TEST(Ledger, JobsCutTheStudyIntoEqualPieces) {
  const Folder folder;
  Store store = openStore(folder / "x.sqlite");
  const StudyRecord study = addStudy(store, planOf("x", 50, 128));  // 900 points
  const std::vector<JobRecord> jobs = jobsOf(store, study);
  ASSERT_EQ(jobs.size(), 8U);
  std::uint64_t next = 0;
  for (const JobRecord& job : jobs) {
    EXPECT_EQ(job.first_point, next);
    EXPECT_EQ(job.state, JobState::waiting);
    next += job.points;
  }
  EXPECT_EQ(next, 900U);
  EXPECT_EQ(jobs.back().points, 900U - 7 * 128);
}

TEST(Ledger, AFailedJobKeepsItsReasonAndDoesNotLand) {
  const Folder folder;
  Store store = openStore(folder / "x.sqlite");
  const StudyRecord study = addStudy(store, planOf("x", 50, 64));
  JobRecord job = jobsOf(store, study)[2];
  const v1::JobResult late = resultOf(study.plan, job);
  job.attempts = 3;
  job.failure = "the worker ran out of memory";
  expectSuccess(store.fail(study.id, job));
  const JobRecord kept = jobsOf(store, study)[2];
  EXPECT_EQ(kept.state, JobState::failed);
  EXPECT_EQ(kept.attempts, 3U);
  EXPECT_EQ(kept.failure, "the worker ran out of memory");
  const std::vector jobs = {finished(study.id, late)};
  EXPECT_FALSE(store.land(jobs));
}

TEST(Ledger, ACommittedJobNeitherFailsNorIsReplaced) {
  const Folder folder;
  Store store = openStore(folder / "x.sqlite");
  const StudyRecord study = addStudy(store, planOf("x", 50, 64));
  landAll(store, study);
  const JobRecord job = jobsOf(store, study)[0];
  EXPECT_THAT(messageOf(store.fail(study.id, job)), HasSubstr("cannot fail"));
  const std::vector<JobRecord> parts = {{100, 0, 32, JobState::waiting, 0, ""},
                                        {101, 32, 32, JobState::waiting, 0, ""}};
  EXPECT_THAT(messageOf(store.replaceJob(study.id, job.id, parts)), HasSubstr("not waiting"));
}

TEST(Ledger, HalvesStandInPlaceOfTheirJob) {
  const Folder folder;
  Store store = openStore(folder / "x.sqlite");
  const StudyRecord study = addStudy(store, planOf("x", 50, 128));
  const std::vector<JobRecord> halves = {{8, 128, 64, JobState::waiting, 1, ""},
                                         {9, 192, 64, JobState::waiting, 1, ""}};
  expectSuccess(store.replaceJob(study.id, 1, halves));
  const std::vector<JobRecord> jobs = jobsOf(store, study);
  ASSERT_EQ(jobs.size(), 9U);
  EXPECT_EQ(jobs[1].id, 8U);
  EXPECT_EQ(jobs[2].id, 9U);
  EXPECT_EQ(jobs[2].attempts, 1U);
  landAll(store, study);
  EXPECT_EQ(ask(folder / "x.sqlite", "SELECT count(*), max(point) FROM points_x"), "900|899");
}

TEST(Ledger, PartsMustCoverTheirJob) {
  const Folder folder;
  Store store = openStore(folder / "x.sqlite");
  const StudyRecord study = addStudy(store, planOf("x", 50, 128));
  const std::vector<JobRecord> gap = {{8, 128, 64, JobState::waiting, 1, ""},
                                      {9, 193, 63, JobState::waiting, 1, ""}};
  const std::vector<JobRecord> longer = {{8, 128, 64, JobState::waiting, 1, ""},
                                         {9, 192, 65, JobState::waiting, 1, ""}};
  for (const auto& parts : {gap, longer, std::vector<JobRecord>()})
    EXPECT_THAT(messageOf(store.replaceJob(study.id, 1, parts)), HasSubstr("do not cover"));
  EXPECT_EQ(jobsOf(store, study).size(), 8U);
}

TEST(Ledger, StatesOfAStudyAreKept) {
  const Folder folder;
  for (const StudyState state :
       {StudyState::paused, StudyState::cancelled, StudyState::complete, StudyState::running}) {
    Store store = openStore(folder / "x.sqlite");
    if (studiesOf(store).empty()) addStudy(store, planOf("x", 50, 64));
    expectSuccess(store.setState(studiesOf(store)[0].id, state));
    EXPECT_EQ(studiesOf(store)[0].state, state);
    EXPECT_EQ(ask(folder / "x.sqlite", "SELECT state FROM study"), nameOf(state));
  }
  Store store = openStore(folder / "x.sqlite");
  EXPECT_FALSE(store.setState(99, StudyState::paused));
}

}  // namespace
}  // namespace holdfast::coordinator
