#include "coordinator/services/evaluate_request.hpp"

#include <tbb/parallel_for.h>

#include <algorithm>
#include <cmath>
#include <memory>
#include <numeric>
#include <optional>
#include <string>
#include <utility>
#include <variant>
#include <vector>

#include "thermo/evaluator.hpp"
#include "thermo/jet/partial.hpp"

namespace holdfast::coordinator {
namespace {

using thermo::kTile;

/// A request read and checked.
struct Asked {
  std::shared_ptr<const thermo::Candidate> candidate;
  std::vector<thermo::ColumnExpression> columns;
  thermo::Composition z{};
  thermo::Basis basis = thermo::Basis::mass;
  thermo::BeyondValidity beyond = thermo::BeyondValidity::compute;
  thermo::InputPair pair = thermo::InputPair::T_p;
  double second_to_molar = 1;  ///< kg/m3 to mol/m3 where the second quantity is a density by mass
  std::size_t states = 0;
};

struct Components {
  std::vector<std::string> names;
  std::vector<double> mole_fractions;
};

/// Mole fractions of a designated blend, whose fractions are by mass.
Result<Components> ofBlend(const thermo::Blend& blend, const thermo::FluidLibrary& library) {
  Components components{blend.components, {}};
  double sum = 0;
  for (std::size_t i = 0; i < blend.components.size(); ++i) {
    const auto fluid = library.find(blend.components[i]);
    if (!fluid.ok()) return fluid.error();
    components.mole_fractions.push_back(blend.mass_fractions[i] / (*fluid)->M);
    sum += components.mole_fractions.back();
  }
  for (double& fraction : components.mole_fractions) fraction /= sum;
  return components;
}

Result<Components> componentsOf(const v1::EvaluateRequest& request, const thermo::FluidLibrary& library) {
  const auto& names = request.components();
  const auto& fractions = request.mole_fraction();
  if (names.empty()) return Error{"components: at least one is needed"};
  if (names.size() > thermo::kMostComponents)
    return Error{"components: at most " + std::to_string(thermo::kMostComponents)};
  if (fractions.empty()) {
    if (names.size() == 1) {
      if (const thermo::Blend* blend = library.findBlend(names[0])) return ofBlend(*blend, library);
      return Components{{names[0]}, {1.0}};
    }
    return Error{"mole_fraction: a blend of several components needs one a component"};
  }
  if (fractions.size() != names.size()) return Error{"mole_fraction: one a component is needed"};
  double sum = 0;
  for (const double fraction : fractions) {
    if (!(fraction >= 0 && fraction <= 1)) return Error{"mole_fraction: must lie between 0 and 1"};
    sum += fraction;
  }
  // 1e-9: fractions printed with ten digits still pass; anything worse is a slip.
  if (std::abs(sum - 1) > 1e-9) return Error{"mole_fraction: the sum must be 1"};
  return Components{{names.begin(), names.end()}, {fractions.begin(), fractions.end()}};
}

std::optional<thermo::InputPair> pairOf(std::string_view first, std::string_view second) {
  if (first == "T" && second == "p") return thermo::InputPair::T_p;
  if (first == "T" && second == "rho") return thermo::InputPair::T_rho;
  if (first == "T" && second == "beta") return thermo::InputPair::T_beta;
  if (first == "p" && second == "beta") return thermo::InputPair::p_beta;
  return std::nullopt;
}

Result<std::vector<thermo::ColumnExpression>> columnsOf(const v1::EvaluateRequest& request) {
  std::vector<thermo::ColumnExpression> columns;
  columns.reserve(static_cast<std::size_t>(request.columns_size()));
  for (const std::string& text : request.columns()) {
    auto parsed = thermo::parseColumn(text);
    if (const auto* wrong = std::get_if<thermo::GrammarError>(&parsed))
      return Error{"columns: \"" + text + "\", at character " + std::to_string(wrong->offset + 1) + ": " +
                   wrong->message};
    columns.push_back(std::move(std::get<thermo::ColumnExpression>(parsed)));
  }
  return columns;
}

Status checkSizes(const v1::EvaluateRequest& request) {
  if (request.first_values_size() != request.second_values_size())
    return Error{"first_values and second_values: as many of one as of the other are needed"};
  if (request.first_values_size() > EvaluateLimits::kStates)
    return Error{"first_values: at most " + std::to_string(EvaluateLimits::kStates) + " states a request"};
  if (request.columns_size() > EvaluateLimits::kColumns)
    return Error{"columns: at most " + std::to_string(EvaluateLimits::kColumns)};
  if (static_cast<std::size_t>(request.first_values_size()) *
          static_cast<std::size_t>(request.columns_size()) >
      EvaluateLimits::kValues)
    return Error{"at most " + std::to_string(EvaluateLimits::kValues) +
                 " values (states times columns) a request"};
  const auto finite = [](double value) { return std::isfinite(value); };
  if (!std::all_of(request.first_values().begin(), request.first_values().end(), finite) ||
      !std::all_of(request.second_values().begin(), request.second_values().end(), finite))
    return Error{"first_values and second_values: must be finite numbers"};
  return success();
}

Result<Asked> read(const v1::EvaluateRequest& request, CandidateCache& candidates) {
  if (auto sizes = checkSizes(request); !sizes.ok()) return sizes.error();
  Asked asked;
  asked.states = static_cast<std::size_t>(request.first_values_size());
  const auto pair = pairOf(request.first(), request.second());
  if (!pair)
    return Error{"first and second: a state is given by (T,p), (T,rho), (T,beta) or (p,beta), not by (" +
                 request.first().substr(0, 20) + "," + request.second().substr(0, 20) + ")"};
  asked.pair = *pair;
  const auto equation = thermo::equationFamilyOf(request.equation());
  if (!equation) return Error{R"(equation: must be "reference", "peng-robinson" or "soave")"};
  auto columns = columnsOf(request);
  if (!columns.ok()) return columns.error();
  asked.columns = std::move(*columns);
  asked.basis = request.basis() == v1::BASIS_MOLAR ? thermo::Basis::molar : thermo::Basis::mass;
  if (request.refuse_beyond_validity()) asked.beyond = thermo::BeyondValidity::refuse;

  auto components = componentsOf(request, candidates.library());
  if (!components.ok()) return components.error();
  std::copy(components->mole_fractions.begin(), components->mole_fractions.end(), asked.z.begin());
  thermo::CandidateSpec spec;
  spec.components = std::move(components->names);
  spec.equation = *equation;
  if (request.has_reference_state()) {
    const v1::ReferenceState& state = request.reference_state();
    if (!(state.t() > 0) || !std::isfinite(state.t()) || !std::isfinite(state.h()) ||
        !std::isfinite(state.s()))
      return Error{"reference_state: T must be above 0 K, h and s finite"};
    spec.reference_state = {state.t(), state.h(), state.s()};
  }
  auto candidate = candidates.get(spec);
  if (!candidate.ok()) return candidate.error();
  asked.candidate = std::move(*candidate);
  if (asked.pair == thermo::InputPair::T_rho && asked.basis == thermo::Basis::mass)
    asked.second_to_molar = 1 / asked.candidate->model->molarMass(asked.z);
  return asked;
}

/// Where tiles write: every tile its own rows, so that they may be computed side by side.
struct Answer {
  std::vector<double> values;            ///< [state * columns + column]
  std::vector<unsigned char> present;    ///< [state * columns + column]
  std::vector<thermo::Absence> absence;  ///< [tile * columns + column]: the first one of the tile
  std::vector<thermo::Reason> reason;    ///< [state]
  std::string phase, outcome;            ///< [state]
};

void evaluateTile(const v1::EvaluateRequest& request, const Asked& asked, const thermo::Evaluator& evaluator,
                  std::size_t tile, Answer& answer) {
  const std::size_t first = tile * kTile;
  const std::size_t columns = asked.columns.size();
  thermo::InputTile input;
  input.count = static_cast<int>(std::min<std::size_t>(kTile, asked.states - first));
  input.pair = asked.pair;
  for (int k = 0; k < input.count; ++k) {
    const int state = static_cast<int>(first) + k;
    input.first[k] = request.first_values(state);
    input.second[k] = request.second_values(state) * asked.second_to_molar;
  }
  input.first.fill(input.count);
  input.second.fill(input.count);
  // Some 500 bytes a column and more: one a thread, kept.
  thread_local thermo::ColumnTile out;
  evaluator.evaluate(input, asked.z, out);
  for (int k = 0; k < input.count; ++k) {
    const auto lane = static_cast<std::size_t>(k);
    const std::size_t state = first + lane;
    answer.phase[state] = static_cast<char>(out.phase[lane]);
    answer.outcome[state] = static_cast<char>(out.outcome[lane]);
    answer.reason[state] = out.reason[lane];
    const bool has_numbers =
        out.outcome[lane] == thermo::Outcome::ok || out.outcome[lane] == thermo::Outcome::extrapolated;
    if (!has_numbers) continue;
    for (std::size_t c = 0; c < columns; ++c) {
      const thermo::Absence absence = out.columns.reason[c][lane];
      if (absence == thermo::Absence::none) {
        answer.values[state * columns + c] = out.columns.value[c][k];
        answer.present[state * columns + c] = 1;
      } else if (answer.absence[tile * columns + c] == thermo::Absence::none) {
        answer.absence[tile * columns + c] = absence;
      }
    }
  }
}

}  // namespace

Result<v1::EvaluateReply> evaluateRequest(const v1::EvaluateRequest& request, CandidateCache& candidates) {
  auto read_result = read(request, candidates);
  if (!read_result.ok()) return read_result.error();
  const Asked& asked = *read_result;
  const std::size_t columns = asked.columns.size();
  const std::size_t tiles = (asked.states + kTile - 1) / kTile;

  Answer answer{std::vector<double>(asked.states * columns),
                std::vector<unsigned char>(asked.states * columns),
                std::vector<thermo::Absence>(tiles * columns, thermo::Absence::none),
                std::vector<thermo::Reason>(asked.states, thermo::Reason::none),
                std::string(asked.states, '\0'),
                std::string(asked.states, '\0')};
  const thermo::Evaluator evaluator(asked.candidate, asked.columns, asked.basis, asked.beyond);
  if (tiles == 1) {
    evaluateTile(request, asked, evaluator, 0, answer);
  } else {
    tbb::parallel_for(std::size_t{0}, tiles,
                      [&](std::size_t tile) { evaluateTile(request, asked, evaluator, tile, answer); });
  }

  v1::EvaluateReply reply;
  reply.mutable_values()->Add(answer.values.begin(), answer.values.end());
  reply.set_phase(std::move(answer.phase));
  reply.set_outcome(std::move(answer.outcome));
  std::string& presence = *reply.mutable_presence();
  presence.assign((answer.present.size() + 7) / 8, '\0');
  for (std::size_t i = 0; i < answer.present.size(); ++i)
    if (answer.present[i] != 0)
      presence[i / 8] = static_cast<char>(static_cast<unsigned char>(presence[i / 8]) | (1U << (i % 8)));
  reply.mutable_reason()->Reserve(static_cast<int>(asked.states));
  for (const thermo::Reason reason : answer.reason)
    reply.add_reason(reason == thermo::Reason::none ? std::string()
                                                    : std::string(thermo::sentenceOf(reason)));
  for (std::size_t c = 0; c < columns; ++c) {
    thermo::Absence absence = thermo::Absence::none;
    for (std::size_t tile = 0; tile < tiles && absence == thermo::Absence::none; ++tile)
      absence = answer.absence[tile * columns + c];
    reply.add_absence(absence == thermo::Absence::none ? std::string()
                                                       : std::string(thermo::sentenceOf(absence)));
  }
  return reply;
}

}  // namespace holdfast::coordinator
