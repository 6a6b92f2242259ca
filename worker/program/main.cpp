// holdfast-worker: computes for a coordinator, for as long as it is left running.
#include <spdlog/sinks/stdout_color_sinks.h>
#include <spdlog/spdlog.h>
#include <unistd.h>

#include <CLI/CLI.hpp>
#include <algorithm>
#include <array>
#include <csignal>
#include <memory>
#include <string>
#include <thread>

#include "proto/build_identity.hpp"
#include "worker/join/join.hpp"

namespace {

using namespace holdfast;

worker::Leaving leaving;
static_assert(std::atomic<bool>::is_always_lock_free);

/// The first signal: finish what is in hand. The second: drop it.
void onSignal(int /*signal*/) {
  if (leaving.soon.exchange(true)) leaving.now = true;
}

void handleSignals() {
  struct sigaction action {};
  action.sa_handler = onSignal;
  sigemptyset(&action.sa_mask);
  action.sa_flags = SA_RESTART;
  sigaction(SIGINT, &action, nullptr);
  sigaction(SIGTERM, &action, nullptr);
}

std::string hostAndProcess() {
  std::array<char, 256> host{};
  if (gethostname(host.data(), host.size() - 1) != 0) return std::to_string(getpid());
  return std::string(host.data()) + ":" + std::to_string(getpid());
}

int join(const std::string& address, unsigned threads) {
  const auto folder = thermo::FluidLibrary::findFolder();
  if (!folder.ok()) {
    spdlog::error("{}", folder.error().message);
    return 1;
  }
  auto loaded = thermo::FluidLibrary::load(*folder);
  if (!loaded.ok()) {
    spdlog::error("{}", loaded.error().message);
    return 1;
  }
  const auto library = std::make_shared<const thermo::FluidLibrary>(std::move(*loaded));
  handleSignals();
  worker::JoinOptions options;
  options.name = hostAndProcess();
  options.threads = threads;
  spdlog::info("holdfast-worker {} joins {} with {} threads", buildIdentity(), address, threads);
  const Status served = worker::serve(worker::channelTo(address), library, options, leaving);
  if (served.ok()) return 0;
  spdlog::error("{}", served.error().message);
  return 1;
}

}  // namespace

int main(int argc, char** argv) {
  spdlog::set_default_logger(spdlog::stderr_color_mt("holdfast-worker"));
  CLI::App app("Computes studies for a coordinator.", "holdfast-worker");
  app.set_version_flag("--version", std::string(buildIdentity()));
  std::string address;
  unsigned threads = std::max(1U, std::thread::hardware_concurrency());
  app.add_option("--join", address, "the coordinator, HOST:PORT")->required();
  app.add_option("--threads", threads, "threads that compute; all processors if not given")
      ->check(CLI::Range(1, 4096));
  try {
    app.parse(argc, argv);
  } catch (const CLI::ParseError& error) {
    return app.exit(error) == 0 ? 0 : 2;
  }
  return join(address, threads);
}
