// The programs as a user has them: study file in, store out.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cstring>
#include <fstream>
#include <map>
#include <thread>

#include "coordinator/study/study.hpp"
#include "tests/support/process.hpp"
#include "tests/support/stand_in.hpp"

namespace holdfast {
namespace {

using namespace std::chrono_literals;
using testing::HasSubstr;
using tests::Process;
using tests::program;
using tests::query;
using tests::Row;

/// A small map of propane that has every phase, points out of range, and a column that is absent at some.
constexpr const char* kMap = R"(
title = "Propane"
equation = "reference"
basis = "mass"
[[candidate]]
fluid = "R-290"
[[axis]]
quantity = "T"
from = "200 K"
to = "450 K"
count = 61
[[axis]]
quantity = "p"
from = "0.5 bar"
to = "80 bar"
count = 40
[collect]
quantities = ["rho", "h", "s", "cp", "w", "beta"]
partials = ["(dh/dp)_T", "(dT/dp)_s"]
)";

class SweepTest : public testing::Test {
 protected:
  std::filesystem::path write(const std::string& name, const std::string& text) const {
    std::ofstream(folder / name) << text;
    return folder / name;
  }
  /// Starts the program.
  Process run(std::vector<std::string> words, const std::string& log = "log") const {
    words.insert(words.begin(), program("holdfast"));
    return Process(std::move(words), folder / log);
  }
  tests::TemporaryFolder folder;
};

/// The rows of a study, in order of their points.
std::vector<Row> rowsOf(const std::filesystem::path& store, const std::string& study) {
  return query(store, "SELECT * FROM points_" + study + " ORDER BY point");
}

/// The same from a prepared study, without queue, wire or store: point, columns.
std::vector<Row> evaluatedDirectly(const v1::Plan& plan) {
  const auto prepared = worker::PreparedStudy::prepare(plan, *tests::library());
  if (!prepared.ok()) throw std::runtime_error(prepared.error().message);
  v1::LeasedJob all;
  all.set_points(static_cast<std::uint32_t>(plan.points()));
  const std::atomic<bool> stop{false};
  const auto result = (*prepared)->evaluate(all, stop);
  if (!result.ok()) throw std::runtime_error(result.error().message);
  std::vector<Row> rows;
  for (std::size_t point = 0; point < plan.points(); ++point) {
    Row row{std::to_string(point), std::to_string(static_cast<int>(result->outcome()[point]))};
    for (const v1::ColumnData& column : result->columns()) {
      double value = 0;
      std::memcpy(&value, column.values().data() + point * sizeof(double), sizeof(double));
      const bool present =
          column.presence().empty() ||
          ((static_cast<unsigned char>(column.presence()[point / 8]) >> (point % 8)) & 1U) != 0;
      row.push_back(present ? tests::hex(value) : "");
    }
    rows.push_back(std::move(row));
  }
  return rows;
}

TEST_F(SweepTest, StoreEqualsDirectEvaluationToTheBitWithAnyThreads) {
  const auto study = write("propane.toml", kMap);
  const auto reading = coordinator::readStudy("propane", kMap, *tests::library(), {});
  ASSERT_TRUE(reading.plan) << render("propane.toml", reading.diagnostics);
  const std::vector<Row> wanted = evaluatedDirectly(*reading.plan);
  for (const char* threads : {"1", "2", "5"}) {
    const auto store = folder / (std::string("store") + threads);
    Process process = run({"run", study.string(), "--store", store.string(), "--threads", threads});
    ASSERT_EQ(process.wait(), 0) << process.output();
    EXPECT_EQ(query(store,
                    "SELECT point, outcome, rho, h, s, cp, w, beta, dh_dp_at_T, dT_dp_at_s FROM "
                    "points_propane ORDER BY point"),
              wanted)
        << threads << " threads";
  }
}

TEST_F(SweepTest, RowsAreTheSameWithOneTwoAndThreeWorkersOverTcp) {
  const auto study = write("propane.toml", kMap);
  Process alone = run({"run", study.string(), "--store", (folder / "alone").string()});
  ASSERT_EQ(alone.wait(), 0) << alone.output();
  const std::vector<Row> wanted = rowsOf(folder / "alone", "propane");
  for (int count = 1; count <= 3; ++count) {
    const auto store = folder / ("shared" + std::to_string(count));
    tests::ServeProcess coordinator(store, folder / "serve");
    std::vector<std::unique_ptr<Process>> workers;
    for (int i = 0; i < count; ++i)
      workers.push_back(std::make_unique<Process>(
          std::vector<std::string>{program("holdfast-worker"), "--join", coordinator.address, "--threads",
                                   std::to_string(1 + i)},
          folder / ("worker" + std::to_string(i))));
    Process submit = run({"submit", study.string(), "--coordinator", coordinator.address}, "submit");
    ASSERT_EQ(submit.wait(), 0) << submit.output();
    Process follow = run({"follow", "propane", "--coordinator", coordinator.address}, "follow");
    EXPECT_EQ(follow.wait(), 0) << follow.output();
    EXPECT_THAT(follow.output(), HasSubstr("complete"));
    for (auto& worker : workers) {
      worker->signal(SIGTERM);
      EXPECT_EQ(worker->wait(), 0) << worker->output();
    }
    coordinator.process.signal(SIGTERM);
    EXPECT_EQ(coordinator.process.wait(), 0);
    EXPECT_EQ(rowsOf(store, "propane"), wanted) << count << " workers";
  }
}

TEST_F(SweepTest, CtrlCPausesAndRunGoesOn) {
  std::string text = kMap;
  text.replace(text.find("count = 61"), 10, "count = 30000");
  const auto study = write("propane.toml", text);
  const auto store = folder / "store";
  Process first = run({"run", study.string(), "--store", store.string(), "--threads", "1"});
  for (int i = 0; i < 3000; ++i) {
    if (std::filesystem::exists(store) &&
        !query(store, "SELECT 1 FROM sqlite_master WHERE name = 'job'").empty() &&
        query(store, "SELECT count(*) FROM job WHERE state = 'committed'")[0][0] != "0")
      break;
    std::this_thread::sleep_for(5ms);
  }
  first.signal(SIGINT);
  EXPECT_EQ(first.wait(), 1);
  EXPECT_THAT(first.output(), HasSubstr("go on with"));
  EXPECT_EQ(query(store, "SELECT state FROM study"), (std::vector<Row>{{"paused"}}));
  Process again = run({"run", study.string(), "--store", store.string()});
  EXPECT_EQ(again.wait(), 0) << again.output();
  EXPECT_THAT(again.output(), HasSubstr("going on"));
  EXPECT_EQ(query(store, "SELECT count(*), count(DISTINCT point), max(point) FROM points_propane"),
            (std::vector<Row>{{"1200000", "1200000", "1199999"}}));
  Process over = run({"run", study.string(), "--store", store.string()});
  EXPECT_EQ(over.wait(), 0);
  EXPECT_THAT(over.output(), HasSubstr("is complete"));
}

TEST_F(SweepTest, AnotherStudyOfTheSameNameIsRefusedUnlessItReplaces) {
  const auto store = folder / "store";
  const auto study = write("propane.toml", kMap);
  ASSERT_EQ(run({"run", study.string(), "--store", store.string()}).wait(), 0);
  std::string text = kMap;
  text.replace(text.find("count = 61"), 10, "count = 11");
  write("propane.toml", text);
  Process refused = run({"run", study.string(), "--store", store.string()});
  EXPECT_EQ(refused.wait(), 2);
  EXPECT_THAT(refused.output(), HasSubstr("identity"));
  EXPECT_EQ(rowsOf(store, "propane").size(), 61 * 40);
  EXPECT_EQ(run({"run", study.string(), "--store", store.string(), "--replace"}).wait(), 0);
  EXPECT_EQ(rowsOf(store, "propane").size(), 11 * 40);
}

TEST_F(SweepTest, WrongStudyIsExitTwoAndLeavesNoStore) {
  std::string text = kMap;
  text.replace(text.find("R-290"), 5, "R-29O");
  const auto study = write("propane.toml", text);
  Process process = run({"run", study.string(), "--store", (folder / "store").string()});
  EXPECT_EQ(process.wait(), 2);
  EXPECT_THAT(process.output(), HasSubstr("propane.toml:6:"));
  EXPECT_THAT(process.output(), HasSubstr("R-29O"));
  EXPECT_FALSE(std::filesystem::exists(folder / "store"));
}

TEST_F(SweepTest, WrongUsageIsExitTwo) {
  EXPECT_EQ(run({"run"}).wait(), 2);
  EXPECT_EQ(run({"no-such-command"}).wait(), 2);
  EXPECT_EQ(run({"run", (folder / "nothing.toml").string()}).wait(), 2);
  EXPECT_EQ(run({"serve", "--listen", "0.0.0.0:0", "--store", (folder / "store").string()}).wait(), 2);
}

TEST_F(SweepTest, DryRunSaysWhatItCostsAndDoesNothing) {
  const auto study = write("propane.toml", kMap);
  Process process = run({"run", study.string(), "--dry-run", "--store", (folder / "store").string()});
  EXPECT_EQ(process.wait(), 0);
  EXPECT_THAT(process.output(), HasSubstr("rows in"));
  EXPECT_FALSE(std::filesystem::exists(folder / "store"));
}

TEST_F(SweepTest, CautionsStandAtTheEndOfARun) {
  const auto study = write("propane.toml", kMap);
  Process process = run({"run", study.string(), "--store", (folder / "store").string()});
  EXPECT_EQ(process.wait(), 0);
  EXPECT_THAT(process.output(), HasSubstr("flammable: R-290"));
  EXPECT_THAT(process.output(), HasSubstr("local codes and licensed practice"));
}

}  // namespace
}  // namespace holdfast
