// Landing of jobs against plain prepared INSERT of the same rows into the same table: rows a second and their
// ratio, taken within a round because a shared machine drifts. Goal: ratio >= 2.
#include <benchmark/benchmark.h>
#include <sqlite3.h>
#include <unistd.h>

#include <algorithm>
#include <chrono>
#include <cstdio>
#include <cstdlib>
#include <cstring>
#include <filesystem>
#include <optional>
#include <string>
#include <vector>

#include "coordinator/store/store.hpp"
#include "proto/points.hpp"

namespace {

using namespace holdfast;

constexpr std::uint32_t kRowsOfJob = 4096;
constexpr int kJobs = 32;
constexpr std::uint64_t kRows = std::uint64_t{kRowsOfJob} * kJobs;

void orDie(bool good, const std::string& message) {
  if (good) return;
  std::fprintf(stderr, "ingest: %s\n", message.c_str());
  std::exit(1);
}

/// One fluid over T and p, and columns enough for `reals` REAL columns in all.
v1::Plan planOf(int reals) {
  v1::Plan plan;
  plan.set_name("ingest");
  plan.set_basis(v1::BASIS_MASS);
  v1::PlannedCandidate* propane = plan.add_candidates();
  propane->set_label("R-290");
  propane->set_equation("reference");
  propane->add_components("R-290");
  propane->add_molar_mass(0.0440956);
  propane->mutable_fixed()->add_mole_fraction(1);
  for (const char* quantity : {"T", "p"}) {
    v1::PlannedAxis* axis = plan.add_axes();
    axis->set_quantity(quantity);
    const bool is_T = std::strcmp(quantity, "T") == 0;
    const std::uint64_t count = is_T ? 512 : kRows / 512;
    for (std::uint64_t i = 0; i < count; ++i)
      axis->add_values(is_T ? 250.0 + 0.125 * static_cast<double>(i) : 1e5 + 1234.5 * static_cast<double>(i));
  }
  const std::string bases = "Tpvuhsag";
  std::vector<std::string> columns = {"rho", "h", "s", "u", "cp", "cv", "w", "Z"};
  for (const char of : bases)
    for (const char by : bases)
      for (const char held : std::string("Tps"))
        if (of != by && by != held && held != of)
          columns.push_back(std::string("(d") + of + "/d" + by + ")_" + held);
  for (int c = 0; c + 2 < reals; ++c) plan.add_columns(columns[static_cast<std::size_t>(c)]);
  plan.set_points(kRows);
  plan.set_points_per_job(kRowsOfJob);
  return plan;
}

/// Every job's result; full doubles without short forms.
std::vector<v1::JobResult> resultsOf(const v1::Plan& plan) {
  std::vector<v1::JobResult> results(kJobs);
  for (int j = 0; j < kJobs; ++j) {
    v1::JobResult& result = results[static_cast<std::size_t>(j)];
    result.set_job(static_cast<std::uint64_t>(j));
    result.set_first_point(static_cast<std::uint64_t>(j) * kRowsOfJob);
    result.set_points(kRowsOfJob);
    result.set_phase(std::string(kRowsOfJob, 2));
    result.set_outcome(std::string(kRowsOfJob, 0));
    std::vector<double> values(kRowsOfJob);
    for (int c = 0; c < plan.columns_size(); ++c) {
      for (std::uint32_t k = 0; k < kRowsOfJob; ++k) values[k] = 1.0 / (1 + k + 4096.0 * c + 17.0 * j);
      result.add_columns()->set_values(values.data(), values.size() * sizeof(double));
    }
  }
  return results;
}

const thermo::FluidLibrary& library() {
  static const auto loaded = thermo::FluidLibrary::load(*thermo::FluidLibrary::findFolder());
  orDie(loaded.ok(), loaded.ok() ? "" : loaded.error().message);
  return *loaded;
}

struct Files {
  Files() {
    std::string pattern = (std::filesystem::temp_directory_path() / "holdfast-ingest-XXXXXX").string();
    folder = mkdtemp(pattern.data());
  }
  ~Files() { std::filesystem::remove_all(folder); }
  std::filesystem::path folder;
};

double seconds(std::chrono::steady_clock::time_point from) {
  return std::chrono::duration<double>(std::chrono::steady_clock::now() - from).count();
}

coordinator::Store storeWithStudy(const std::filesystem::path& file, const v1::Plan& plan) {
  auto store = coordinator::Store::open(file);
  orDie(store.ok(), store.ok() ? "" : store.error().message);
  const std::vector<coordinator::CandidateFacts> facts = {{"pure", {}}};
  const auto added = store->add(plan, "", "", "", library(), facts);
  orDie(added.ok(), added.ok() ? "" : added.error().message);
  return std::move(*store);
}

/// Seconds to land all jobs, `at_once` a transaction, until the file stands alone: the write-ahead log is
/// part of the work.
double land(const std::filesystem::path& file, const v1::Plan& plan,
            const std::vector<v1::JobResult>& results, std::size_t at_once) {
  std::optional store = storeWithStudy(file, plan);
  std::vector<coordinator::FinishedJob> jobs;
  for (const v1::JobResult& result : results) jobs.push_back({1, &result, "host:1", 0, 0, 0});
  const auto start = std::chrono::steady_clock::now();
  for (std::size_t first = 0; first < jobs.size(); first += at_once) {
    const Status landed = store->land(std::span(jobs).subspan(first, std::min(at_once, jobs.size() - first)));
    orDie(landed.ok(), landed.ok() ? "" : landed.error().message);
  }
  store.reset();
  return seconds(start);
}

/// Seconds to insert the same rows as anyone would: one prepared INSERT a row, one transaction a job,
/// write-ahead log, commits on the disk, SQLite's own page size; from the columns as they arrive.
double insertPlainly(const std::filesystem::path& file, const std::string& create_table, const v1::Plan& plan,
                     const std::vector<v1::JobResult>& results) {
  sqlite3* database = nullptr;
  const auto run = [&](const std::string& sql) {
    orDie(sqlite3_exec(database, sql.c_str(), nullptr, nullptr, nullptr) == SQLITE_OK, sql);
  };
  orDie(sqlite3_open(file.c_str(), &database) == SQLITE_OK, "no database");
  run("PRAGMA journal_mode = WAL; PRAGMA synchronous = FULL");
  run(create_table);
  const plan::Points points(plan);
  const int axes = plan.axes_size(), columns = plan.columns_size();
  std::string insert = "INSERT INTO points_ingest VALUES (?, ?, ?, ?";
  for (int c = 0; c < axes + columns; ++c) insert += ", ?";
  const auto start = std::chrono::steady_clock::now();
  sqlite3_stmt* statement = nullptr;
  orDie(sqlite3_prepare_v2(database, (insert + ")").c_str(), -1, &statement, nullptr) == SQLITE_OK, insert);
  for (const v1::JobResult& result : results) {
    std::vector<std::vector<double>> axis_values(static_cast<std::size_t>(axes));
    for (int a = 0; a < axes; ++a) {
      axis_values[static_cast<std::size_t>(a)].resize(result.points());
      points.axisValues(a, result.first_point(), result.points(),
                        axis_values[static_cast<std::size_t>(a)].data());
    }
    run("BEGIN");
    for (std::uint32_t k = 0; k < result.points(); ++k) {
      sqlite3_bind_int64(statement, 1, static_cast<sqlite3_int64>(result.first_point() + k));
      sqlite3_bind_int64(statement, 2, 0);
      sqlite3_bind_int64(statement, 3, result.phase()[k]);
      sqlite3_bind_int64(statement, 4, result.outcome()[k]);
      for (int a = 0; a < axes; ++a)
        sqlite3_bind_double(statement, 5 + a, axis_values[static_cast<std::size_t>(a)][k]);
      for (int c = 0; c < columns; ++c) {
        double value = 0;
        std::memcpy(&value, result.columns(c).values().data() + k * sizeof value, sizeof value);
        sqlite3_bind_double(statement, 5 + axes + c, value);
      }
      orDie(sqlite3_step(statement) == SQLITE_DONE, sqlite3_errmsg(database));
      sqlite3_reset(statement);
    }
    run("COMMIT");
  }
  sqlite3_finalize(statement);
  sqlite3_close(database);
  return seconds(start);
}

/// The text of the points table as the store made it.
std::string createTableOf(const v1::Plan& plan) {
  const Files files;
  storeWithStudy(files.folder / "x.sqlite", plan);
  sqlite3* database = nullptr;
  sqlite3_stmt* statement = nullptr;
  orDie(sqlite3_open((files.folder / "x.sqlite").c_str(), &database) == SQLITE_OK, "no database");
  sqlite3_prepare_v2(database, "SELECT sql FROM sqlite_schema WHERE name = 'points_ingest'", -1, &statement,
                     nullptr);
  orDie(sqlite3_step(statement) == SQLITE_ROW, "no table");
  std::string sql = reinterpret_cast<const char*>(sqlite3_column_text(statement, 0));
  sqlite3_finalize(statement);
  sqlite3_close(database);
  return sql;
}

double median(std::vector<double> values) {
  std::ranges::sort(values);
  return values[values.size() / 2];
}

/// Arguments: REAL columns, jobs a transaction.
void ingest(benchmark::State& state) {
  const v1::Plan plan = planOf(static_cast<int>(state.range(0)));
  const std::vector<v1::JobResult> results = resultsOf(plan);
  const std::string create_table = createTableOf(plan);
  std::vector<double> ratios, landing, plain;
  for (auto _ : state) {
    const Files files;
    plain.push_back(insertPlainly(files.folder / "plain.sqlite", create_table, plan, results));
    landing.push_back(
        land(files.folder / "store.sqlite", plan, results, static_cast<std::size_t>(state.range(1))));
    ratios.push_back(plain.back() / landing.back());
    state.SetIterationTime(landing.back());
  }
  state.counters["plain_rows_per_s"] = static_cast<double>(kRows) / median(plain);
  state.counters["landed_rows_per_s"] = static_cast<double>(kRows) / median(landing);
  state.counters["ratio"] = median(ratios);
}
BENCHMARK(ingest)
    ->ArgNames({"reals", "jobs_at_once"})
    ->Args({30, 1})
    ->Args({30, 8})
    ->Args({12, 8})
    ->Args({100, 8})
    ->Iterations(5)
    ->UseManualTime()
    ->Unit(benchmark::kMillisecond);

}  // namespace

BENCHMARK_MAIN();
