// holdfast: runs studies, here or on a coordinator.
#include <spdlog/sinks/stdout_color_sinks.h>
#include <spdlog/spdlog.h>

#include "coordinator/program/commands.hpp"
#include "proto/build_identity.hpp"

int main(int argc, char** argv) {
  using namespace holdfast::coordinator;
  // Standard output is for answers.
  spdlog::set_default_logger(spdlog::stderr_color_mt("holdfast"));

  CLI::App app(
      "Working fluids: properties and their exact partial derivatives over sweeps, into SQLite.\n"
      "Design decisions with flammable, toxic or high-pressure fluids are for local codes and licensed "
      "practice.",
      "holdfast");
  app.set_version_flag("--version", std::string(holdfast::buildIdentity()));
  app.require_subcommand(1);
  int exit_status = 0;
  addRunCommand(app, exit_status);
  addServeCommand(app, exit_status);
  addSubmitCommand(app, exit_status);
  addFollowCommand(app, exit_status);
  addCancelCommand(app, exit_status);
  addListCommand(app, exit_status);
  addEvaluateCommand(app, exit_status);
  addFluidsCommand(app, exit_status);
  try {
    app.parse(argc, argv);
  } catch (const CLI::ParseError& error) {
    return app.exit(error) == 0 ? 0 : 2;
  }
  return exit_status;
}
