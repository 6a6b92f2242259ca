// `holdfast run`: coordinator and worker in one process, over gRPC's in-process channel.
#include <spdlog/spdlog.h>
#include <unistd.h>

#include <algorithm>
#include <atomic>
#include <chrono>
#include <filesystem>
#include <iostream>
#include <memory>
#include <string>
#include <thread>
#include <vector>

#include "coordinator/program/cautions.hpp"
#include "coordinator/program/commands.hpp"
#include "coordinator/program/data.hpp"
#include "coordinator/program/progress_line.hpp"
#include "coordinator/program/signals.hpp"
#include "coordinator/program/study_file.hpp"
#include "coordinator/services/coordinator.hpp"
#include "coordinator/services/server.hpp"
#include "coordinator/study/estimate.hpp"
#include "worker/join/join.hpp"

namespace holdfast::coordinator {
namespace {

constexpr int kGood = 0, kFailed = 1, kWrong = 2;
constexpr std::chrono::milliseconds kBetweenProgress{200};

struct RunOptions {
  std::string study;
  std::string store;
  unsigned threads = std::max(1U, std::thread::hardware_concurrency());
  bool dry_run = false;
  bool replace = false;
};

int complain(const std::string& message, int status) {
  std::cerr << message << (message.ends_with('\n') ? "" : "\n");
  return status;
}

/// The worker of this process, on a thread of its own.
class OwnWorker {
 public:
  OwnWorker(Server& server, std::shared_ptr<const thermo::FluidLibrary> library, unsigned threads)
      : thread_([this, channel = server.inProcessChannel(), library = std::move(library), threads] {
          worker::JoinOptions options;
          options.name = "run:" + std::to_string(getpid());
          options.threads = threads;
          const Status served = worker::serve(channel, library, options, leaving_);
          if (!served.ok()) spdlog::error("{}", served.error().message);
          ended_ = true;
        }) {}
  ~OwnWorker() {
    leaving_.soon = true;
    thread_.join();
  }
  OwnWorker(const OwnWorker&) = delete;
  OwnWorker& operator=(const OwnWorker&) = delete;

  bool hasEnded() const { return ended_; }

  /// Lets it finish what is in hand; a second Ctrl-C drops that.
  void stop() {
    leaving_.soon = true;
    while (!ended_) {
      if (signalsCounted() > 1) leaving_.now = true;
      std::this_thread::sleep_for(std::chrono::milliseconds(10));
    }
  }

 private:
  worker::Leaving leaving_;
  std::atomic<bool> ended_{false};
  std::thread thread_;
};

/// Returns at the study's end, or after Ctrl-C when the worker has stopped.
v1::Progress work(Coordinator& coordinator, Server& server, const std::string& name,
                  const std::shared_ptr<const thermo::FluidLibrary>& library, unsigned threads) {
  OwnWorker worker(server, library, threads);
  ProgressLine line;
  for (;;) {
    v1::Progress progress = *coordinator.await(name, kBetweenProgress);
    const bool over = progress.state() != nameOf(StudyState::running) || coordinator.failure();
    if (!over && !worker.hasEnded() && signalsCounted() == 0) {
      line.show(progress);
      continue;
    }
    line.end();
    if (!over && signalsCounted() > 0) {
      std::cerr << "stopping: what is in hand is finished first (Ctrl-C again drops it)\n";
      worker.stop();
    }
    return progress;
  }
}

std::vector<std::string> componentsOf(const v1::Plan& plan) {
  std::vector<std::string> components;
  for (const v1::PlannedCandidate& candidate : plan.candidates())
    components.insert(components.end(), candidate.components().begin(), candidate.components().end());
  return components;
}

int run(const RunOptions& options) {
  auto request = readStudyFile(options.study);
  if (!request.ok()) return complain(request.error().message, kWrong);
  request->set_replace(options.replace);
  const std::string& name = request->name();

  const auto loaded = loadData();
  if (!loaded.ok()) return complain(loaded.error().message, kFailed);
  const auto& library = *loaded;

  // Read before the store is opened: a wrong study leaves no file behind.
  const StudyReading reading = readStudy(name, request->text(), *library, StudyLimits{});
  if (!reading.plan) return complain(render(options.study, reading.diagnostics), kWrong);
  if (options.dry_run) {
    std::cout << render(estimate(*reading.plan, options.threads), options.threads) << "\n";
    return kGood;
  }
  const std::filesystem::path file = options.store.empty() ? name + ".sqlite" : options.store;
  auto store = Store::open(file);
  if (!store.ok()) return complain(store.error().message, kFailed);

  spdlog::set_level(spdlog::level::warn);  // the progress line tells what is going on
  countSignals();
  CoordinatorOptions coordinator_options;
  coordinator_options.only = name;
  auto started = Coordinator::start(std::move(*store), library, coordinator_options);
  if (!started.ok()) return complain(started.error().message, kFailed);
  Coordinator& coordinator = **started;
  v1::SubmitReply submitted;
  if (const grpc::Status status = coordinator.submit(*request, submitted); !status.ok()) {
    const bool is_wrong = status.error_code() == grpc::StatusCode::INVALID_ARGUMENT ||
                          status.error_code() == grpc::StatusCode::ALREADY_EXISTS;
    return complain(status.error_message(), is_wrong ? kWrong : kFailed);
  }
  if (submitted.state() == nameOf(StudyState::complete)) {
    std::cout << name << " is complete: " << submitted.points_done() << " points in " << file.string()
              << "\n";
    return kGood;
  }
  if (submitted.points_done() > 0)
    std::cerr << "going on: " << submitted.points_done() << " of " << submitted.points()
              << " points are done\n";

  auto server = Server::start(coordinator, library, {std::nullopt, 1});
  if (!server.ok()) return complain(server.error().message, kFailed);
  const auto begin = std::chrono::steady_clock::now();
  v1::Progress progress = work(coordinator, **server, name, library, options.threads);
  if (const auto failure = coordinator.failure())
    return complain("the store has failed: " + failure->message, kFailed);
  if (progress.state() == nameOf(StudyState::running)) {
    const grpc::Status paused = coordinator.pause(name);
    if (!paused.ok()) return complain(paused.error_message(), kFailed);
    progress = *coordinator.await(name, std::chrono::seconds(60));
  }
  if (progress.state() != nameOf(StudyState::complete)) {
    std::cerr << "paused: " << progress.points_done() << " of " << progress.points()
              << " points are done; go on with\n  holdfast run " << options.study << " --store "
              << file.string() << "\n";
    return kFailed;
  }
  const std::chrono::duration<double> time = std::chrono::steady_clock::now() - begin;
  const auto points = static_cast<double>(progress.points_done() - submitted.points_done());
  std::cout << name << ": " << progress.points_done() << " points in " << file.string() << " ("
            << static_cast<std::uint64_t>(points / time.count()) << " points/s); "
            << describeOutcomes(progress) << "\n"
            << cautionsOf(componentsOf(*reading.plan), *library);
  if (progress.jobs_failed() > 0)
    return complain(
        std::to_string(progress.jobs_failed()) +
            " jobs failed; why is in the store: SELECT id, failure FROM job WHERE state = 'failed'",
        kFailed);
  return kGood;
}

}  // namespace

void addRunCommand(CLI::App& app, int& exit_status) {
  auto options = std::make_shared<RunOptions>();
  CLI::App* command = app.add_subcommand("run", "run a study on this machine, into a store; again: go on");
  command->add_option("study", options->study, "the study's file, NAME.toml")->required();
  command->add_option("--store", options->store, "the store's file; NAME.sqlite in this folder if not given");
  command->add_option("--threads", options->threads, "threads that compute; all processors if not given")
      ->check(CLI::Range(1, 4096));
  command->add_flag("--dry-run", options->dry_run, "check the study and say what it would cost");
  command->add_flag("--replace", options->replace, "drop another study of this name from the store first");
  command->callback([options, &exit_status] { exit_status = run(*options); });
}

}  // namespace holdfast::coordinator
