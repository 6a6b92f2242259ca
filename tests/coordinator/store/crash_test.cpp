// The coordinator is killed while it lands: what was acknowledged is there, nothing is there twice, the rest
// waits.
#include <gtest/gtest.h>
#include <sys/wait.h>

#include <chrono>
#include <csignal>
#include <random>
#include <set>
#include <thread>

#include "tests/coordinator/store/store_support.hpp"

namespace holdfast::coordinator {
namespace {

/// In a child process: lands every waiting job, two a transaction, and writes the number of each to `pipe`
/// once it is acknowledged.
[[noreturn]] void landUntilKilled(const std::filesystem::path& file, int pipe) {
  Store store = openStore(file);
  const StudyRecord study = studiesOf(store).at(0);
  std::vector<JobRecord> waiting;
  for (const JobRecord& job : jobsOf(store, study))
    if (job.state == JobState::waiting) waiting.push_back(job);
  for (std::size_t i = 0; i + 1 < waiting.size(); i += 2) {
    const v1::JobResult first = resultOf(study.plan, waiting[i]),
                        second = resultOf(study.plan, waiting[i + 1]);
    const std::vector jobs = {finished(study.id, first), finished(study.id, second)};
    if (!store.land(jobs)) _exit(1);
    const std::array<std::uint64_t, 2> acknowledged = {waiting[i].id, waiting[i + 1].id};
    if (write(pipe, acknowledged.data(), sizeof acknowledged) != sizeof acknowledged) _exit(1);
  }
  for (;;) pause();  // all landed: the killer still comes
}

TEST(Crash, NothingAcknowledgedIsLostAndNothingIsThereTwice) {
  const Folder folder;
  const std::filesystem::path file = folder / "x.sqlite";
  const v1::Plan plan = planOf("x", 20'000, 640);  // 360,000 points, 563 jobs
  {
    Store store = openStore(file);
    addStudy(store, plan);
  }
  std::set<std::uint64_t> acknowledged;
  std::mt19937 random(20240229);
  int kills_while_landing = 0;
  for (int kill_number = 0; kill_number < 25; ++kill_number) {
    std::array<int, 2> ends{};
    ASSERT_EQ(pipe(ends.data()), 0);
    const pid_t child = fork();
    if (child == 0) {
      close(ends[0]);
      landUntilKilled(file, ends[1]);
    }
    close(ends[1]);
    // Now and then before it has even opened the store.
    std::this_thread::sleep_for(std::chrono::microseconds(random() % 40'000));
    ASSERT_EQ(kill(child, SIGKILL), 0);
    int status = 0;
    ASSERT_EQ(waitpid(child, &status, 0), child);
    ASSERT_TRUE(WIFSIGNALED(status));
    std::uint64_t job = 0;
    const std::size_t before = acknowledged.size();
    while (read(ends[0], &job, sizeof job) == sizeof job)
      EXPECT_TRUE(acknowledged.insert(job).second) << "job " << job << " landed twice";
    close(ends[0]);
    kills_while_landing += acknowledged.size() > before && acknowledged.size() < 562 ? 1 : 0;

    Connection connection(file);
    ASSERT_EQ(ask(connection, "PRAGMA quick_check"), "ok");
    // Rows and marks are one transaction.
    ASSERT_EQ(connection.integer("SELECT count(*) FROM points_x"),
              connection.integer("SELECT coalesce(sum(points), 0) FROM job WHERE state = 'committed'"));
    ASSERT_EQ(ask(connection, "SELECT DISTINCT state FROM job WHERE state NOT IN ('waiting', 'committed')"),
              "");
    for (const std::uint64_t id : acknowledged)
      ASSERT_EQ(connection.integer("SELECT state = 'committed' FROM job WHERE id = " + std::to_string(id)),
                1);
  }
  EXPECT_GT(kills_while_landing, 5);
  {
    Store store = openStore(file);
    landAll(store, studiesOf(store).at(0), 16);
  }
  EXPECT_EQ(ask(file, "PRAGMA integrity_check"), "ok");
  EXPECT_EQ(ask(file, "SELECT count(*), min(point), max(point), count(DISTINCT point) FROM points_x"),
            "360000|0|359999|360000");
  EXPECT_EQ(
      ask(file,
          "SELECT count(*) FROM points_x WHERE rho <> point + 0.001 OR (rho IS NULL) <> (point % 7 = 0)"),
      "0");
}

}  // namespace
}  // namespace holdfast::coordinator
