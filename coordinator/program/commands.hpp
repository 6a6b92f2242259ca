// The program's commands. Each function adds one to `app`; when the command was given, it runs while the
// command line is parsed and leaves its exit status in `exit_status`: 0 good, 1 the work failed, 2 wrong
// usage or a wrong study.
#pragma once

#include <CLI/CLI.hpp>

namespace holdfast::coordinator {

/// Where a coordinator listens and where its clients look, if not told otherwise.
inline constexpr const char* kDefaultCoordinator = "127.0.0.1:4747";

void addRunCommand(CLI::App& app, int& exit_status);
void addServeCommand(CLI::App& app, int& exit_status);
void addSubmitCommand(CLI::App& app, int& exit_status);
void addFollowCommand(CLI::App& app, int& exit_status);
void addCancelCommand(CLI::App& app, int& exit_status);
void addListCommand(CLI::App& app, int& exit_status);
void addEvaluateCommand(CLI::App& app, int& exit_status);
void addFluidsCommand(CLI::App& app, int& exit_status);

}  // namespace holdfast::coordinator
