// `holdfast evaluate`: a few states from the command line or a file, here or on a running coordinator.
#include <grpcpp/grpcpp.h>

#include <array>
#include <chrono>
#include <cmath>
#include <fstream>
#include <iostream>
#include <iterator>
#include <memory>
#include <string>
#include <vector>

#include "coordinator/program/answers.hpp"
#include "coordinator/program/cautions.hpp"
#include "coordinator/program/commands.hpp"
#include "coordinator/program/data.hpp"
#include "coordinator/services/evaluate_request.hpp"
#include "coordinator/study/units.hpp"
#include "holdfast.grpc.pb.h"
#include "thermo/fluids/csv.hpp"

namespace holdfast::coordinator {
namespace {

struct EvaluateOptions {
  std::string fluid, fractions, by = "mole", equation = "reference", basis = "mass", want, states_file,
                                format = "table", coordinator;
  std::vector<std::string> at;
};

std::vector<std::string> split(const std::string& text, char sign) {
  std::vector<std::string> parts(1);
  for (const char c : text)
    if (c == sign)
      parts.emplace_back();
    else
      parts.back() += c;
  return parts;
}

/// Splits --want at commas that stand outside brackets: x[...] may hold a chemical name with commas.
std::vector<std::string> splitColumns(const std::string& text) {
  std::vector<std::string> parts(1);
  int depth = 0;
  for (const char c : text) {
    if (c == '[') ++depth;
    if (c == ']') --depth;
    if (c == ',' && depth == 0)
      parts.emplace_back();
    else
      parts.back() += c;
  }
  for (std::string& part : parts) {
    part.erase(0, part.find_first_not_of(" \t"));
    part.erase(part.find_last_not_of(" \t") + 1);
  }
  return parts;
}

/// Components and mole fractions of "R-290", "R-410A", "R-32/R-1234yf" with --fractions, or the ISO 817 form
/// by mass "R-32/R-1234yf (68.9/31.1)".
Status setFluid(const EvaluateOptions& options, const thermo::FluidLibrary& library,
                v1::EvaluateRequest& request) {
  std::string names = options.fluid;
  std::string fractions = options.fractions;
  bool by_mass = options.by == "mass";
  const std::size_t bracket = names.find(" (");
  const bool is_known = library.find(names).ok() || library.findBlend(names) != nullptr;
  if (!is_known && bracket != std::string::npos && names.back() == ')' &&
      names.find('/', bracket) != std::string::npos) {
    if (!fractions.empty())
      return Error{"--fractions: the fluid \"" + names + "\" has its fractions already"};
    fractions = names.substr(bracket + 2, names.size() - bracket - 3);
    names.resize(bracket);
    by_mass = true;
  }
  const std::vector<std::string> components = is_known ? std::vector<std::string>{names} : split(names, '/');
  for (const std::string& name : components) {
    if (library.findBlend(name) == nullptr)
      if (const auto found = library.find(name); !found.ok()) return found.error();
    request.add_components(name);
  }
  if (fractions.empty()) {
    if (components.size() > 1)
      return Error{"--fractions: a blend needs them, as in --fractions 0.5/0.5 --by mole"};
    return success();
  }
  std::vector<double> amounts;
  double sum = 0;
  for (const std::string& text : split(fractions, '/')) {
    const auto value = thermo::wholeNumber(text);
    if (!value || !(*value >= 0)) return Error{"--fractions: \"" + text + "\" is not a fraction"};
    amounts.push_back(*value);
    sum += *value;
  }
  if (amounts.size() != components.size()) return Error{"--fractions: one a component is needed"};
  if (std::abs(sum - 1) > 1e-6 && std::abs(sum - 100) > 1e-4)
    return Error{"--fractions: they do not sum to 1 (or to 100)"};
  double total = 0;
  for (std::size_t i = 0; i < amounts.size(); ++i) {
    if (by_mass) {
      const auto found = library.find(components[i]);
      if (!found.ok()) return found.error();
      amounts[i] /= (*found)->M;
    }
    total += amounts[i];
  }
  for (const double amount : amounts) request.add_mole_fraction(amount / total);
  return success();
}

/// Names the pair in the order that Evaluate takes them; true if that is the other order than given.
bool nameThePair(std::string first, std::string second, v1::EvaluateRequest& request) {
  const bool swapped = second == "T" || (first == "beta" && second == "p");
  if (swapped) std::swap(first, second);
  request.set_first(first);
  request.set_second(second);
  return swapped;
}

const char* unitOf(const std::string& quantity, const std::string& basis) {
  if (quantity == "T") return "K";
  if (quantity == "p") return "Pa";
  if (quantity == "rho") return basis == "mass" ? "kg/m3" : "mol/m3";
  return "1";
}

Status setStates(const EvaluateOptions& options, v1::EvaluateRequest& request) {
  if (options.states_file.empty()) {
    if (options.at.size() != 2) return Error{"--at: a state needs two, as in --at T=300K --at p=1MPa"};
    std::array<std::string, 2> names;
    std::array<double, 2> values{};
    for (std::size_t i = 0; i < 2; ++i) {
      const std::size_t equals = options.at[i].find('=');
      if (equals == std::string::npos)
        return Error{"--at: \"" + options.at[i] + "\" is not of the form T=300K"};
      names[i] = options.at[i].substr(0, equals);
      const auto value = parseQuantity(options.at[i].substr(equals + 1), unitOf(names[i], options.basis));
      if (!value.ok()) return Error{"--at " + names[i] + ": " + value.error().message};
      values[i] = *value;
    }
    const bool swapped = nameThePair(names[0], names[1], request);
    request.add_first_values(values[swapped ? 1 : 0]);
    request.add_second_values(values[swapped ? 0 : 1]);
    return success();
  }
  if (!options.at.empty()) return Error{"--states: not together with --at"};
  std::ifstream stream(options.states_file, std::ios::binary);
  if (!stream) return Error{options.states_file + ": cannot be read"};
  const std::string text{std::istreambuf_iterator<char>(stream), std::istreambuf_iterator<char>()};
  const std::vector<std::string> header = split(text.substr(0, text.find_first_of("\r\n")), ',');
  if (header.size() != 2)
    return Error{options.states_file + ":1: the header names two quantities, as in T,p"};
  const auto table = thermo::CsvTable::parse(options.states_file, text, header);
  if (!table.ok()) return table.error();
  const bool swapped = nameThePair(header[0], header[1], request);
  for (std::size_t row = 0; row < table->rows(); ++row) {
    const auto first = table->requiredNumber(row, header[swapped ? 1 : 0]);
    if (!first.ok()) return first.error();
    const auto second = table->requiredNumber(row, header[swapped ? 0 : 1]);
    if (!second.ok()) return second.error();
    request.add_first_values(*first);
    request.add_second_values(*second);
  }
  return success();
}

int complain(const std::string& message, int status) {
  std::cerr << message << "\n";
  return status;
}

int evaluate(const EvaluateOptions& options) {
  const auto library = loadData();
  if (!library.ok()) return complain(library.error().message, 1);
  v1::EvaluateRequest request;
  for (const auto& set : {setFluid(options, **library, request), setStates(options, request)})
    if (!set.ok()) return complain(set.error().message, 2);
  request.set_equation(options.equation);
  request.set_basis(options.basis == "molar" ? v1::BASIS_MOLAR : v1::BASIS_MASS);
  const std::vector<std::string> columns = splitColumns(options.want);
  for (const std::string& column : columns) request.add_columns(column);

  v1::EvaluateReply reply;
  if (options.coordinator.empty()) {
    CandidateCache candidates(*library, 1);
    auto answered = evaluateRequest(request, candidates);
    if (!answered.ok()) return complain(answered.error().message, 2);
    reply = std::move(*answered);
  } else {
    const auto stub =
        v1::Evaluation::NewStub(grpc::CreateChannel(options.coordinator, grpc::InsecureChannelCredentials()));
    grpc::ClientContext context;
    context.set_deadline(std::chrono::system_clock::now() + std::chrono::seconds(60));
    const grpc::Status status = stub->Evaluate(&context, request, &reply);
    if (!status.ok())
      return complain(status.error_message(),
                      status.error_code() == grpc::StatusCode::INVALID_ARGUMENT ? 2 : 1);
  }
  const Answers answers{request, reply, columns};
  std::cout << (options.format == "csv"    ? asCsv(answers)
                : options.format == "json" ? asJson(answers)
                                           : asTable(answers));
  std::vector<std::string> components(request.components().begin(), request.components().end());
  if (const thermo::Blend* blend = (*library)->findBlend(components[0])) components = blend->components;
  std::cerr << cautionsOf(components, **library);
  const std::vector<std::string> failures = whyNotComputed(answers);
  for (const std::string& reason : failures) std::cerr << reason << "\n";
  for (const std::string& reason : whyAbsent(answers)) std::cerr << reason << "\n";
  return failures.empty() ? 0 : 1;
}

}  // namespace

void addEvaluateCommand(CLI::App& app, int& exit_status) {
  auto options = std::make_shared<EvaluateOptions>();
  CLI::App* command = app.add_subcommand("evaluate", "properties and partials of a few states");
  command->add_option("--fluid", options->fluid, "fluid, designated blend, or components as R-32/R-1234yf")
      ->required();
  command->add_option("--fractions", options->fractions, "of the components, as 0.5/0.5");
  command->add_option("--by", options->by, "what the fractions are by")
      ->check(CLI::IsMember({"mole", "mass"}))
      ->capture_default_str();
  command->add_option("--at", options->at, "half of a state, as T=300K; twice");
  command->add_option("--states", options->states_file,
                      "many states: a CSV file, its header two quantities, SI");
  command->add_option("--want", options->want, "quantities and partials, as \"rho,h,(dh/dp)_T\"")->required();
  command
      ->add_option("--equation", options->equation,
                   "reference, peng-robinson, soave: never a silent fallback")
      ->capture_default_str();
  command->add_option("--basis", options->basis, "of specific quantities")
      ->check(CLI::IsMember({"mass", "molar"}))
      ->capture_default_str();
  command->add_option("--format", options->format, "of the answer")
      ->check(CLI::IsMember({"table", "csv", "json"}))
      ->capture_default_str();
  command->add_option("--coordinator", options->coordinator,
                      "HOST:PORT: ask this one instead of computing here");
  command->callback([options, &exit_status] { exit_status = evaluate(*options); });
}

}  // namespace holdfast::coordinator
