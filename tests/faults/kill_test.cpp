// kill -9 of workers and of the coordinator at random moments: no point is missing, none is there twice,
// every one has its values. The moments come from a seeded generator; where they fall in the work is up to
// the machine.
#include <gtest/gtest.h>

#include <atomic>
#include <memory>
#include <random>
#include <thread>

#include "tests/support/process.hpp"
#include "tests/support/stand_in.hpp"

namespace holdfast {
namespace {

using namespace std::chrono_literals;
using tests::Process;
using tests::ServeProcess;

constexpr std::uint64_t kNoPoison = ~std::uint64_t{0};

std::unique_ptr<Process> startWorker(const std::string& address, const std::filesystem::path& log,
                                     std::uint64_t poison = kNoPoison) {
  return std::make_unique<Process>(
      std::vector<std::string>{tests::program("faults_tests"), "--worker", address, std::to_string(poison)},
      log);
}

std::string stateOf(const std::filesystem::path& store) {
  return tests::query(store, "SELECT state FROM study").at(0).at(0);
}

TEST(KillTest, WorkersAndCoordinatorKilledAtRandomMomentsLoseAndDoubleNothing) {
  const tests::TemporaryFolder folder;
  const auto store = folder / "store";
  const v1::Plan plan = tests::standInPlan("sweep", 10'000);
  tests::seedStore(store, plan);
  std::mt19937 random(20'240'229);
  auto coordinator = std::make_unique<ServeProcess>(store, folder / "serve");
  const std::string address = coordinator->address;
  std::array<std::unique_ptr<Process>, 2> workers;
  for (std::size_t i = 0; i < workers.size(); ++i)
    workers[i] = startWorker(address, folder / ("worker" + std::to_string(i)));
  int kills = 0;
  for (; kills < 24 && stateOf(store) == "running"; ++kills) {
    std::this_thread::sleep_for(std::chrono::milliseconds(random() % 250));
    if (kills % 3 == 2) {
      coordinator->process.signal(SIGKILL);
      EXPECT_EQ(coordinator->process.wait(), -SIGKILL);
      coordinator = std::make_unique<ServeProcess>(store, folder / "serve", address);
    } else {
      const std::size_t which = random() % workers.size();
      workers[which]->signal(SIGKILL);
      EXPECT_EQ(workers[which]->wait(), -SIGKILL);
      workers[which] = startWorker(address, folder / ("worker" + std::to_string(which)));
    }
  }
  EXPECT_GE(kills, 20) << "the study was done before it could be disturbed enough";
  for (int i = 0; i < 3000 && stateOf(store) == "running"; ++i) std::this_thread::sleep_for(20ms);
  EXPECT_EQ(stateOf(store), "complete");
  coordinator->process.signal(SIGTERM);
  EXPECT_EQ(coordinator->process.wait(), 0);
  EXPECT_EQ(tests::faultsOf(store, plan), "");
}

TEST(KillTest, PointThatKillsItsWorkersIsFoundAndTheRestIsDone) {
  constexpr std::uint64_t kPoison = 128 * 5 + 77;
  const tests::TemporaryFolder folder;
  const auto store = folder / "store";
  const v1::Plan plan = tests::standInPlan("sweep", 20);
  tests::seedStore(store, plan);
  ServeProcess coordinator(store, folder / "serve");
  int died = 0;
  while (stateOf(store) == "running") {
    ASSERT_LT(died, 60);
    auto worker = startWorker(coordinator.address, folder / "worker", kPoison);
    std::atomic<bool> ended{false};
    std::thread watch([&] {
      while (!ended && stateOf(store) == "running") std::this_thread::sleep_for(10ms);
      worker->signal(SIGTERM);
    });
    const int status = worker->wait();
    ended = true;
    watch.join();
    died += status == 3 ? 1 : 0;
  }
  // Three losses make it a suspect; 128 points are halved seven times, then the point itself.
  EXPECT_GE(died, 3 + 7 + 1);
  coordinator.process.signal(SIGTERM);
  EXPECT_EQ(coordinator.process.wait(), 0);
  EXPECT_EQ(tests::faultsOf(store, plan, {kPoison}), "");
}

}  // namespace
}  // namespace holdfast
