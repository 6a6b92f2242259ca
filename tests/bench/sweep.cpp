// `holdfast run`, the program itself, against what its stages alone would allow: cores / (CPU seconds a row
// of evaluation + of landing). All measured in one run. Goal: ratio >= 0.8.
#include <benchmark/benchmark.h>
#include <sys/wait.h>
#include <tbb/global_control.h>
#include <time.h>
#include <unistd.h>

#include <algorithm>
#include <atomic>
#include <chrono>
#include <cstdio>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <string>
#include <thread>
#include <vector>

#include "coordinator/store/store.hpp"
#include "coordinator/study/study.hpp"
#include "worker/evaluate/evaluate_job.hpp"

namespace {

using namespace holdfast;

constexpr const char* kStudy = R"(
title = "Carbon dioxide around its critical point"
equation = "reference"
basis = "mass"
[[candidate]]
fluid = "R-744"
[[axis]]
quantity = "T"
from = "15 degC"
to = "65 degC"
count = 2000
[[axis]]
quantity = "p"
from = "60 bar"
to = "120 bar"
count = 1000
[collect]
quantities = ["rho", "h", "s", "cp", "w"]
partials = ["(drho/dT)_p", "(drho/dp)_T", "(dh/dp)_T", "(dT/dp)_s"]
)";

template <class T>
T orDie(Result<T> result) {
  if (result.ok()) return std::move(result).value();
  std::fprintf(stderr, "sweep: %s\n", result.error().message.c_str());
  std::exit(1);
}

double cpuSeconds() {
  timespec time{};
  clock_gettime(CLOCK_PROCESS_CPUTIME_ID, &time);
  return static_cast<double>(time.tv_sec) + 1e-9 * static_cast<double>(time.tv_nsec);
}

struct Stages {
  double evaluate = 0, land = 0;  ///< CPU seconds a row
};

/// Both stages alone, one thread each, over half of the study.
Stages stagesOf(const v1::Plan& plan, const thermo::FluidLibrary& library,
                const std::filesystem::path& folder) {
  const tbb::global_control one(tbb::global_control::max_allowed_parallelism, 1);
  const auto prepared = orDie(worker::PreparedStudy::prepare(plan, library));
  const std::uint64_t jobs = plan.points() / plan.points_per_job() / 2;
  const auto rows = static_cast<double>(jobs * plan.points_per_job());
  std::vector<v1::JobResult> results;
  const std::atomic<bool> stop{false};
  Stages out;
  double begin = cpuSeconds();
  for (std::uint64_t j = 0; j < jobs; ++j) {
    v1::LeasedJob job;
    job.set_job(j);
    job.set_first_point(j * plan.points_per_job());
    job.set_points(plan.points_per_job());
    results.push_back(orDie(prepared->evaluate(job, stop)));
  }
  out.evaluate = (cpuSeconds() - begin) / rows;
  auto store = orDie(coordinator::Store::open(folder / "alone.sqlite"));
  const std::vector<coordinator::CandidateFacts> facts(static_cast<std::size_t>(plan.candidates_size()));
  const auto study = orDie(store.add(plan, "identity", "text", "version", library, facts));
  begin = cpuSeconds();
  for (std::size_t j = 0; j < results.size(); j += 8) {
    std::vector<coordinator::FinishedJob> batch;
    for (std::size_t k = j; k < std::min(j + 8, results.size()); ++k) {
      coordinator::FinishedJob finished;
      finished.study = study.id;
      finished.result = &results[k];
      batch.push_back(finished);
    }
    orDie(store.land(batch));
  }
  // The end of a study moves the log into the file: part of landing.
  orDie(store.setState(study.id, coordinator::StudyState::complete));
  out.land = (cpuSeconds() - begin) / rows;
  return out;
}

double runSeconds(const std::filesystem::path& study, const std::filesystem::path& store) {
  const auto begin = std::chrono::steady_clock::now();
  const pid_t child = fork();
  if (child == 0) {
    if (std::freopen("/dev/null", "w", stdout) == nullptr ||
        std::freopen("/dev/null", "w", stderr) == nullptr)
      _exit(126);
    execl(HOLDFAST_BIN_DIR "/holdfast", "holdfast", "run", study.c_str(), "--store", store.c_str(), nullptr);
    _exit(127);
  }
  int status = 0;
  waitpid(child, &status, 0);
  if (!WIFEXITED(status) || WEXITSTATUS(status) != 0) {
    std::fprintf(stderr, "sweep: holdfast run failed\n");
    std::exit(1);
  }
  return std::chrono::duration<double>(std::chrono::steady_clock::now() - begin).count();
}

void sweep(benchmark::State& state) {
  std::string pattern = (std::filesystem::temp_directory_path() / "holdfast-XXXXXX").string();
  const std::filesystem::path folder = mkdtemp(pattern.data());
  const auto library = orDie(thermo::FluidLibrary::load(orDie(thermo::FluidLibrary::findFolder())));
  const auto reading = coordinator::readStudy("sweep", kStudy, library, {});
  std::ofstream(folder / "sweep.toml") << kStudy;
  const double cores = std::thread::hardware_concurrency();
  for (auto _ : state) {
    for (const char* name : {"alone.sqlite", "run.sqlite"})
      for (const char* tail : {"", "-wal", "-shm", ".lock"})
        std::filesystem::remove(folder / (std::string(name) + tail));
    const Stages stages = stagesOf(*reading.plan, library, folder);
    const double seconds = runSeconds(folder / "sweep.toml", folder / "run.sqlite");
    const double rate = static_cast<double>(reading.plan->points()) / seconds;
    state.SetIterationTime(seconds);
    state.counters["points_per_s"] = rate;
    state.counters["evaluate_ns_a_row"] = 1e9 * stages.evaluate;
    state.counters["land_ns_a_row"] = 1e9 * stages.land;
    state.counters["ratio"] = rate / (cores / (stages.evaluate + stages.land));
  }
  std::filesystem::remove_all(folder);
}
BENCHMARK(sweep)->UseManualTime()->Iterations(3)->Unit(benchmark::kMillisecond);

}  // namespace

BENCHMARK_MAIN();
