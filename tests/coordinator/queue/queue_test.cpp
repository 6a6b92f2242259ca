// Every transition of a job, under a clock that the test turns.
#include "coordinator/queue/queue.hpp"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <random>
#include <set>

namespace holdfast::coordinator {
namespace {

using std::chrono::seconds;
using testing::ElementsAre;
using testing::IsEmpty;
using testing::SizeIs;

constexpr StudyId kStudy = 1;
constexpr WorkerId kAnna = 10, kBert = 11;
constexpr LeaseId kFirstLease = 1000;

std::vector<QueuedJob> jobs(std::size_t count, std::uint32_t points = 128) {
  std::vector<QueuedJob> all;
  for (std::size_t i = 0; i < count; ++i) all.push_back({i, i * points, points, 0});
  return all;
}

std::vector<std::uint64_t> ids(const std::optional<GrantedLease>& lease) {
  std::vector<std::uint64_t> all;
  if (lease)
    for (const QueuedJob& job : lease->jobs) all.push_back(job.id);
  return all;
}

class QueueTest : public testing::Test {
 protected:
  void add(std::size_t count, std::uint32_t points = 128, StudyId study = kStudy) {
    queue.addStudy(study, jobs(count, points), count);
  }
  std::optional<GrantedLease> grant(WorkerId worker, std::size_t most = 1) {
    return queue.grant(worker, most, now);
  }
  /// Leases the one job that waits to a fresh worker and loses it.
  Losses loseOnce() {
    const WorkerId worker = ++fresh;
    EXPECT_TRUE(queue.grant(worker, 1, now));
    return queue.lose(worker);
  }

  QueuePolicy policy{};
  Queue queue{policy, kFirstLease};
  Instant now{seconds(1'000'000)};
  WorkerId fresh = 100;
};

TEST_F(QueueTest, JobWaitsIsLeasedReturnedAndCommitted) {
  add(1);
  EXPECT_EQ(queue.counts(kStudy).waiting, 1);
  const auto lease = grant(kAnna);
  ASSERT_TRUE(lease);
  EXPECT_EQ(lease->lease, kFirstLease);
  EXPECT_EQ(queue.counts(kStudy).leased, 1);
  EXPECT_EQ(queue.held(kAnna), 1);
  queue.returned(kAnna, lease->lease, 0, now);
  EXPECT_EQ(queue.counts(kStudy).returned, 1);
  EXPECT_EQ(queue.held(kAnna), 0);
  queue.committed(kStudy, 0);
  EXPECT_EQ(queue.counts(kStudy).committed, 1);
  EXPECT_EQ(queue.counts(kStudy).open(), 0);
}

TEST_F(QueueTest, LeaseCarriesSeveralJobsInOrder) {
  add(5);
  EXPECT_THAT(ids(grant(kAnna, 3)), ElementsAre(0, 1, 2));
  EXPECT_THAT(ids(grant(kBert, 3)), ElementsAre(3, 4));
  EXPECT_FALSE(grant(kBert, 3));
}

TEST_F(QueueTest, DeadlinePassesAndTheJobWaitsAgain) {
  add(1);
  const auto first = grant(kAnna);
  now += policy.lease - seconds(1);
  EXPECT_THAT(queue.expire(now).leases, IsEmpty());
  now += seconds(2);
  EXPECT_THAT(queue.expire(now).leases, SizeIs(1));
  EXPECT_EQ(queue.counts(kStudy).waiting, 1);
  const auto second = grant(kBert);
  ASSERT_TRUE(second);
  EXPECT_GT(second->lease, first->lease);
}

TEST_F(QueueTest, ResultUnderAnExpiredLeaseIsNotFound) {
  add(1);
  const auto lease = grant(kAnna);
  now += policy.lease + seconds(1);
  (void)queue.expire(now);
  const auto later = grant(kBert);
  EXPECT_FALSE(queue.find(kAnna, lease->lease, 0));
  queue.returned(kAnna, lease->lease, 0, now);
  EXPECT_EQ(queue.counts(kStudy).leased, 1) << "the late result changed the job that another holds";
  EXPECT_TRUE(queue.find(kBert, later->lease, 0));
}

TEST_F(QueueTest, LeaseBelongsToOneWorker) {
  add(1);
  const auto lease = grant(kAnna);
  EXPECT_FALSE(queue.find(kBert, lease->lease, 0));
  EXPECT_FALSE(queue.find(kAnna, lease->lease + 1, 0));
  EXPECT_FALSE(queue.find(kAnna, lease->lease, 1));
}

TEST_F(QueueTest, ResultCountsOnce) {
  add(2);
  const auto lease = grant(kAnna, 2);
  queue.returned(kAnna, lease->lease, 0, now);
  queue.returned(kAnna, lease->lease, 0, now);
  EXPECT_EQ(queue.counts(kStudy).returned, 1);
}

TEST_F(QueueTest, HeartbeatRenewsTheLease) {
  add(1);
  const auto lease = grant(kAnna);
  for (int i = 0; i < 5; ++i) {
    now += policy.lease - seconds(1);
    queue.heard(kAnna, now);
    EXPECT_THAT(queue.expire(now).leases, IsEmpty());
  }
  EXPECT_TRUE(queue.find(kAnna, lease->lease, 0));
}

TEST_F(QueueTest, WorkerThatBeatsButReturnsNothingIsHung) {
  add(1);
  (void)grant(kAnna);
  const Instant start = now;
  bool lost = false;
  while (!lost && now < start + 2 * policy.stall) {
    now += seconds(10);
    queue.heard(kAnna, now);
    lost = !queue.expire(now).leases.empty();
  }
  EXPECT_TRUE(lost);
  EXPECT_GE(now, start + policy.stall);
}

TEST_F(QueueTest, ResultsKeepASlowWorkersLeaseAlive) {
  add(3);
  const auto lease = grant(kAnna, 3);
  now += policy.stall - seconds(1);
  queue.heard(kAnna, now);
  queue.returned(kAnna, lease->lease, 0, now);
  queue.heard(kAnna, now);
  now += policy.lease - seconds(1);
  EXPECT_THAT(queue.expire(now).leases, IsEmpty());
}

TEST_F(QueueTest, GivenBackJobsWaitAtOnceAndNothingIsHeldAgainstThem) {
  add(1);
  for (int i = 0; i < 10; ++i) {
    const auto lease = grant(kAnna);
    ASSERT_TRUE(lease);
    queue.giveBack(kAnna, lease->lease, 0);
  }
  EXPECT_EQ(queue.counts(kStudy).waiting, 1);
  EXPECT_THAT(loseOnce().decisions, IsEmpty());
  EXPECT_TRUE(grant(kAnna));
}

TEST_F(QueueTest, ThirdErrorFailsTheJobAndTheRestGoesOn) {
  add(2);
  for (int attempt = 1; attempt <= 3; ++attempt) {
    auto lease = grant(kAnna, 2);
    ASSERT_TRUE(lease);
    for (const QueuedJob& job : lease->jobs)
      if (job.id == 1) queue.returned(kAnna, lease->lease, 1, now);
    const auto failed = queue.error(kAnna, lease->lease, 0, "the flux capacitor is empty", now);
    EXPECT_EQ(failed.has_value(), attempt == 3);
    if (failed) {
      EXPECT_EQ(failed->job.id, 0);
      EXPECT_EQ(failed->job.attempts, 3);
      EXPECT_EQ(failed->reason, "the flux capacitor is empty");
    }
  }
  EXPECT_FALSE(grant(kAnna));
  EXPECT_EQ(queue.counts(kStudy).failed, 1);
  queue.committed(kStudy, 1);
  EXPECT_EQ(queue.counts(kStudy).open(), 0);
}

TEST_F(QueueTest, ErrorsOfAnEarlierRunCount) {
  queue.addStudy(kStudy, std::vector<QueuedJob>{{7, 0, 64, 2}}, 8);
  const auto lease = grant(kAnna);
  EXPECT_TRUE(queue.error(kAnna, lease->lease, 7, "again", now));
}

TEST_F(QueueTest, LostLeasesAreNoErrors) {
  add(1);
  for (int i = 0; i < 3; ++i) EXPECT_THAT(loseOnce().decisions, IsEmpty());
  const auto lease = grant(kAnna);
  ASSERT_TRUE(lease);
  EXPECT_EQ(lease->jobs[0].attempts, 0);
  queue.returned(kAnna, lease->lease, 0, now);
  queue.committed(kStudy, 0);
  EXPECT_EQ(queue.counts(kStudy).committed, 1);
}

TEST_F(QueueTest, WorkerLossTakesAllItsLeases) {
  add(4);
  (void)grant(kAnna, 2);
  (void)grant(kAnna, 1);
  EXPECT_THAT(queue.lose(kAnna).leases, SizeIs(2));
  EXPECT_EQ(queue.counts(kStudy).waiting, 4);
  EXPECT_EQ(queue.held(kAnna), 0);
}

TEST_F(QueueTest, ReturnedJobIsNotLostWithItsWorker) {
  add(2);
  const auto lease = grant(kAnna, 2);
  queue.returned(kAnna, lease->lease, 0, now);
  (void)queue.lose(kAnna);
  EXPECT_EQ(queue.counts(kStudy).returned, 1);
  EXPECT_EQ(queue.counts(kStudy).waiting, 1);
}

TEST_F(QueueTest, SuspectIsLeasedAloneToAWorkerThatHoldsNothing) {
  add(4);
  for (int i = 0; i < 3; ++i) {
    EXPECT_THAT(ids(grant(kAnna, 1)), ElementsAre(0));
    (void)queue.lose(kAnna);
  }
  const auto alone = grant(kBert, 4);
  EXPECT_THAT(ids(alone), ElementsAre(0));
  EXPECT_FALSE(grant(kBert, 4)) << "a worker with a suspect holds nothing else";
  EXPECT_THAT(ids(grant(kAnna, 2)), ElementsAre(1, 2)) << "the others go on";
}

TEST_F(QueueTest, BusyWorkerRunsEmptyBeforeItTakesASuspect) {
  add(4);
  const auto bert = grant(kBert, 1);
  for (int i = 0; i < 3; ++i) {
    EXPECT_THAT(ids(grant(kAnna, 1)), ElementsAre(1));
    (void)queue.lose(kAnna);
  }
  EXPECT_FALSE(grant(kBert, 1));
  queue.returned(kBert, bert->lease, 0, now);
  EXPECT_THAT(ids(grant(kBert, 4)), ElementsAre(1));
}

TEST_F(QueueTest, LoneJobThatIsLostIsHalvedByTile) {
  queue.addStudy(kStudy, std::vector<QueuedJob>{{0, 640, 200, 0}}, 1);
  for (int i = 0; i < 3; ++i) EXPECT_THAT(loseOnce().decisions, IsEmpty());
  const Losses losses = loseOnce();
  ASSERT_THAT(losses.decisions, SizeIs(1));
  const auto& halved = std::get<JobHalved>(losses.decisions[0]);
  EXPECT_EQ(halved.job, 0);
  EXPECT_EQ(halved.parts[0].id, 1);
  EXPECT_EQ(halved.parts[0].first_point, 640);
  EXPECT_EQ(halved.parts[0].points, 128);
  EXPECT_EQ(halved.parts[1].id, 2);
  EXPECT_EQ(halved.parts[1].first_point, 768);
  EXPECT_EQ(halved.parts[1].points, 72);
  EXPECT_EQ(queue.counts(kStudy).waiting, 2);
}

TEST_F(QueueTest, PoisonPointIsFoundAndGivenUpAndEveryOtherPointIsDone) {
  constexpr std::uint64_t kPoison = 5 * 4096 + 1234;
  add(10, 4096);
  std::vector<int> done(10 * 4096, 0);
  int workers_killed = 0;
  std::set<std::uint64_t> numbers;
  while (queue.counts(kStudy).open() > 0) {
    const WorkerId worker = ++fresh;
    const auto lease = queue.grant(worker, 4, now);
    ASSERT_TRUE(lease);
    bool killed = false;
    for (const QueuedJob& job : lease->jobs) {
      numbers.insert(job.id);
      killed = job.first_point <= kPoison && kPoison < job.first_point + job.points;
      if (killed) break;
      for (std::uint64_t k = 0; k < job.points; ++k) ++done[job.first_point + k];
      queue.returned(worker, lease->lease, job.id, now);
      queue.committed(kStudy, job.id);
    }
    workers_killed += killed ? 1 : 0;
    for (const Decision& decision : queue.lose(worker).decisions) {
      if (const auto* crashed = std::get_if<JobCrashed>(&decision)) {
        EXPECT_EQ(crashed->job.first_point, kPoison);
        EXPECT_EQ(crashed->job.points, 1);
        EXPECT_EQ(crashed->worker, worker);
        ++done[crashed->job.first_point];
        queue.committed(kStudy, crashed->job.id);
      }
    }
  }
  EXPECT_TRUE(std::all_of(done.begin(), done.end(), [](int times) { return times == 1; }));
  // 3 losses, then 4096 = 2^12 points: 12 halvings, then the point itself.
  EXPECT_EQ(workers_killed, 3 + 12 + 1);
}

TEST_F(QueueTest, StudiesTakeTurns) {
  add(4, 64, 1);
  add(4, 64, 2);
  add(4, 64, 3);
  std::vector<StudyId> turns;
  for (WorkerId worker = 1; worker <= 6; ++worker) turns.push_back(grant(worker)->study);
  EXPECT_THAT(turns, ElementsAre(1, 2, 3, 1, 2, 3));
}

TEST_F(QueueTest, RemovedStudyEndsItsLeasesAndOnlyThose) {
  add(2, 64, 1);
  add(2, 64, 2);
  const auto first = grant(kAnna);
  const auto second = grant(kAnna);
  ASSERT_EQ(first->study, 1);
  const auto ended = queue.removeStudy(1);
  ASSERT_THAT(ended, SizeIs(1));
  EXPECT_EQ(ended[0].lease, first->lease);
  EXPECT_EQ(ended[0].worker, kAnna);
  EXPECT_FALSE(queue.find(kAnna, first->lease, first->jobs[0].id));
  EXPECT_TRUE(queue.find(kAnna, second->lease, second->jobs[0].id));
  queue.committed(1, 0);  // still on its way into the store when the study was removed
  EXPECT_EQ(queue.counts(1).open(), 0);
}

TEST_F(QueueTest, LeaseSizeKeepsAWorkerBusyAndLeavesTheEndToAll) {
  EXPECT_GE(leaseSize(1000, 1, 2, 0), 2) << "work while messages travel";
  EXPECT_EQ(leaseSize(1000, 1, 2, 4), 0) << "it has enough";
  EXPECT_EQ(leaseSize(1'000'000, 1, 128, 0), 64) << "the contract's limit";
  EXPECT_EQ(leaseSize(3, 10, 64, 0), 1) << "few are left: one each";
}

TEST_F(QueueTest, NoJobIsLostOrDoubledUnderRandomFaults) {
  // Random histories; the invariant: every point ends up committed exactly once.
  for (unsigned seed = 0; seed < 20; ++seed) {
    std::mt19937 random(seed);
    Queue tried(policy, kFirstLease);
    constexpr std::size_t kJobs = 40;
    tried.addStudy(kStudy, jobs(kJobs, 256), kJobs);
    std::vector<int> done(kJobs * 256, 0);
    std::map<WorkerId, std::vector<GrantedLease>> leases;
    for (int step = 0; tried.counts(kStudy).open() > 0; ++step) {
      ASSERT_LT(step, 100'000);
      now += std::chrono::milliseconds(random() % 2000);
      const WorkerId worker = random() % 4 + 1;
      Losses losses;
      switch (random() % 8) {
        case 0:
          losses = tried.lose(worker);
          leases[worker].clear();
          break;
        case 1:
          losses = tried.expire(now);
          break;
        case 2:
          tried.heard(worker, now);
          break;
        case 3:
        case 4:
          if (auto granted = tried.grant(worker, random() % 5 + 1, now)) leases[worker].push_back(*granted);
          break;
        default:
          for (const GrantedLease& lease : leases[worker])
            for (const QueuedJob& job : lease.jobs) {
              if (random() % 2 == 0) continue;
              const auto held = tried.find(worker, lease.lease, job.id);
              if (!held) continue;
              ASSERT_EQ(held->job.points, job.points);
              if (random() % 10 == 0) {
                tried.giveBack(worker, lease.lease, job.id);
                continue;
              }
              tried.returned(worker, lease.lease, job.id, now);
              for (std::uint64_t k = 0; k < job.points; ++k) ++done[job.first_point + k];
              tried.committed(kStudy, job.id);
            }
      }
      for (const Decision& decision : losses.decisions)
        if (const auto* crashed = std::get_if<JobCrashed>(&decision)) {
          ++done[crashed->job.first_point];
          tried.committed(kStudy, crashed->job.id);
        }
    }
    EXPECT_TRUE(std::all_of(done.begin(), done.end(), [](int times) { return times == 1; }))
        << "seed " << seed;
  }
}

TEST_F(QueueTest, MillionJobsAreNoTrouble) {
  constexpr std::size_t kJobs = 1'000'000;
  add(kJobs, 64);
  std::size_t leased = 0;
  while (const auto lease = grant(++fresh, 64)) leased += lease->jobs.size();
  EXPECT_EQ(leased, kJobs);
}

}  // namespace
}  // namespace holdfast::coordinator
