// `holdfast serve`: the coordinator.
#include <spdlog/spdlog.h>
#include <tbb/global_control.h>

#include <algorithm>
#include <chrono>
#include <memory>
#include <string>
#include <thread>

#include "coordinator/program/commands.hpp"
#include "coordinator/program/data.hpp"
#include "coordinator/program/signals.hpp"
#include "coordinator/services/coordinator.hpp"
#include "coordinator/services/server.hpp"
#include "proto/build_identity.hpp"

namespace holdfast::coordinator {
namespace {

struct ServeOptions {
  std::string listen = kDefaultCoordinator;
  std::string store = "holdfast.sqlite";
  unsigned threads = std::max(1U, std::thread::hardware_concurrency());
  bool insecure = false;
};

int complain(const Error& error, int status) {
  spdlog::error("{}", error.message);
  return status;
}

int serve(const ServeOptions& options) {
  const Exposure exposure = options.insecure ? Exposure::insecure_allowed : Exposure::loopback_only;
  if (const Status allowed = checkListen(options.listen, exposure); !allowed.ok())
    return complain(allowed.error(), 2);
  const auto loaded = loadData();
  if (!loaded.ok()) return complain(loaded.error(), 1);
  const auto& library = *loaded;
  auto store = Store::open(options.store);
  if (!store.ok()) return complain(store.error(), 1);

  countSignals();
  // TBB keeps a place for a thread that waits for the work; here none does.
  const tbb::global_control threads(tbb::global_control::max_allowed_parallelism, options.threads + 1);
  auto coordinator = Coordinator::start(std::move(*store), library, {});
  if (!coordinator.ok()) return complain(coordinator.error(), 1);
  auto server = Server::start(**coordinator, library, {options.listen, options.threads});
  if (!server.ok()) return complain(server.error(), 1);
  const std::size_t colon = options.listen.rfind(':');
  spdlog::info("holdfast {} serves {} on {}:{}", buildIdentity(), options.store,
               options.listen.substr(0, colon), (*server)->port());
  while (signalsCounted() == 0 && !(*coordinator)->failure())
    std::this_thread::sleep_for(std::chrono::milliseconds(50));
  if ((*coordinator)->failure()) return 1;  // said already
  spdlog::info("stopping; studies that run go on when the store is served again");
  return 0;
}

}  // namespace

void addServeCommand(CLI::App& app, int& exit_status) {
  auto options = std::make_shared<ServeOptions>();
  CLI::App* command = app.add_subcommand("serve", "be the coordinator: keep a store, lease work to workers");
  command->add_option("--listen", options->listen, "HOST:PORT; port 0: any that is free")
      ->capture_default_str();
  command->add_option("--store", options->store, "the store's file")->capture_default_str();
  command->add_option("--threads", options->threads, "threads for Evaluate and for reading studies")
      ->check(CLI::Range(1, 4096));
  command->add_flag("--insecure", options->insecure,
                    "listen on other addresses than loopback, with nothing to protect the line");
  command->callback([options, &exit_status] { exit_status = serve(*options); });
}

}  // namespace holdfast::coordinator
