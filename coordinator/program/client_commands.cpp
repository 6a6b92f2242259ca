// `holdfast submit | follow | cancel | list`: commands to a running coordinator.
#include <grpcpp/grpcpp.h>

#include <chrono>
#include <iostream>
#include <memory>
#include <string>

#include "coordinator/program/commands.hpp"
#include "coordinator/program/progress_line.hpp"
#include "coordinator/program/study_file.hpp"
#include "coordinator/store/store.hpp"
#include "holdfast.grpc.pb.h"

namespace holdfast::coordinator {
namespace {

constexpr std::chrono::seconds kPatience{60};

struct ClientOptions {
  std::string coordinator = kDefaultCoordinator;
  std::string what;  ///< the study's file or name
  bool replace = false;
};

std::unique_ptr<v1::Studies::Stub> studiesOf(const ClientOptions& options) {
  return v1::Studies::NewStub(grpc::CreateChannel(options.coordinator, grpc::InsecureChannelCredentials()));
}

/// The status of a call as an exit status, with its message on standard error.
int report(const grpc::Status& status) {
  if (status.ok()) return 0;
  std::cerr << status.error_message() << (status.error_message().ends_with('\n') ? "" : "\n");
  switch (status.error_code()) {
    case grpc::StatusCode::INVALID_ARGUMENT:
    case grpc::StatusCode::ALREADY_EXISTS:
    case grpc::StatusCode::NOT_FOUND:
      return 2;
    default:
      return 1;
  }
}

void patient(grpc::ClientContext& context) {
  context.set_deadline(std::chrono::system_clock::now() + kPatience);
}

int submit(const ClientOptions& options) {
  auto request = readStudyFile(options.what);
  if (!request.ok()) {
    std::cerr << request.error().message << "\n";
    return 2;
  }
  request->set_replace(options.replace);
  grpc::ClientContext context;
  patient(context);
  v1::SubmitReply reply;
  if (const int wrong = report(studiesOf(options)->Submit(&context, *request, &reply)); wrong != 0)
    return wrong;
  std::cout << reply.name() << ": " << reply.state() << ", " << reply.points_done() << " of "
            << reply.points() << " points are done\n";
  return 0;
}

int follow(const ClientOptions& options) {
  v1::FollowRequest request;
  request.set_name(options.what);
  grpc::ClientContext context;
  const auto stream = studiesOf(options)->Follow(&context, request);
  ProgressLine line;
  v1::Progress progress;
  while (stream->Read(&progress)) line.show(progress);
  line.end();
  if (const int wrong = report(stream->Finish()); wrong != 0) return wrong;
  std::cout << progress.name() << ": " << progress.state() << ", " << describe(progress) << "\n";
  const bool good = progress.state() == nameOf(StudyState::complete) && progress.jobs_failed() == 0;
  return good ? 0 : 1;
}

int cancel(const ClientOptions& options) {
  v1::CancelRequest request;
  request.set_name(options.what);
  grpc::ClientContext context;
  patient(context);
  v1::CancelReply reply;
  if (const int wrong = report(studiesOf(options)->Cancel(&context, request, &reply)); wrong != 0)
    return wrong;
  std::cout << options.what << ": " << reply.state() << "\n";
  return 0;
}

int list(const ClientOptions& options) {
  grpc::ClientContext context;
  patient(context);
  v1::ListReply reply;
  if (const int wrong = report(studiesOf(options)->List(&context, {}, &reply)); wrong != 0) return wrong;
  for (const v1::Progress& progress : reply.studies())
    std::cout << progress.name() << ": " << progress.state() << ", " << describe(progress) << "\n";
  return 0;
}

/// A command of this file: its coordinator, and what it does.
CLI::App* add(CLI::App& app, int& exit_status, const std::shared_ptr<ClientOptions>& options,
              const char* name, const char* description, int (*action)(const ClientOptions&)) {
  CLI::App* command = app.add_subcommand(name, description);
  command->add_option("--coordinator", options->coordinator, "HOST:PORT")->capture_default_str();
  command->callback([options, &exit_status, action] { exit_status = action(*options); });
  return command;
}

}  // namespace

void addSubmitCommand(CLI::App& app, int& exit_status) {
  const auto options = std::make_shared<ClientOptions>();
  CLI::App* command = add(app, exit_status, options, "submit", "hand a study to a coordinator", submit);
  command->add_option("study", options->what, "the study's file, NAME.toml")->required();
  command->add_flag("--replace", options->replace, "drop another study of this name first");
}

void addFollowCommand(CLI::App& app, int& exit_status) {
  const auto options = std::make_shared<ClientOptions>();
  add(app, exit_status, options, "follow", "watch a study until it no longer runs", follow)
      ->add_option("name", options->what, "the study's name")
      ->required();
}

void addCancelCommand(CLI::App& app, int& exit_status) {
  const auto options = std::make_shared<ClientOptions>();
  add(app, exit_status, options, "cancel", "stop a study; what is done stays", cancel)
      ->add_option("name", options->what, "the study's name")
      ->required();
}

void addListCommand(CLI::App& app, int& exit_status) {
  add(app, exit_status, std::make_shared<ClientOptions>(), "list", "the studies of a coordinator", list);
}

}  // namespace holdfast::coordinator
