// States and columns: what they cost beside one jet, and what analytic partials cost and are worth beside
// central differences.
#include <benchmark/benchmark.h>

#include <algorithm>
#include <chrono>
#include <cmath>
#include <functional>
#include <string>

#include "tests/support/oracle.hpp"
#include "thermo/evaluator.hpp"

namespace holdfast::thermo {
namespace {

constexpr Composition kPure{1};

const FluidLibrary& library() {
  static const Result<FluidLibrary> loaded = FluidLibrary::load(*FluidLibrary::findFolder());
  return *loaded;
}

std::shared_ptr<const Candidate> candidate(const std::string& name) {
  CandidateSpec spec;
  spec.components = {name};
  return *makeCandidate(library(), spec);
}

std::vector<ColumnExpression> columns(std::initializer_list<const char*> texts) {
  std::vector<ColumnExpression> out;
  for (const char* text : texts) out.push_back(std::get<ColumnExpression>(parseColumn(text)));
  return out;
}

double seconds(const std::function<void()>& work) {
  double least = 1e9;
  for (int round = 0; round < 7; ++round) {
    const auto start = std::chrono::steady_clock::now();
    for (int k = 0; k < 200; ++k) work();
    least = std::min(least,
                     std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count() / 200);
  }
  return least;
}

/// A stretch of a (T,p) sweep, p varying: liquid of a pure fluid.
InputTile sweep(const Candidate& of) {
  InputTile input;
  input.count = kTile;
  input.pair = InputPair::T_p;
  const auto& component = of.model->component(0);
  for (int k = 0; k < kTile; ++k) {
    input.first[k] = 0.8 * component.critical.T;
    input.second[k] = component.critical.p * (0.6 + 0.02 * k);
  }
  return input;
}

void statesAndColumns(benchmark::State& state, const char* name) {
  const auto of = candidate(name);
  const InputTile input = sweep(*of);
  InputTile saturated;
  saturated.count = kTile;
  saturated.pair = InputPair::T_beta;
  for (int k = 0; k < kTile; ++k) {
    saturated.first[k] = of->model->component(0).critical.T * (0.6 + 0.005 * k);
    saturated.second[k] = 1;
  }
  StateTile states;
  solveStates(*of, kPure, BeyondValidity::compute, input, states);
  const auto values = columns({"rho", "h", "s", "cp", "w"});
  auto both = values;
  for (const auto& partial : columns({"(dh/dp)_T", "(ds/dp)_T", "(dT/dp)_h", "(drho/dT)_p", "(drho/dp)_T",
                                      "(dT/dp)_s", "(dh/dp)_s", "(du/dv)_T", "(dh/drho)_s", "(ds/dT)_v"}))
    both.push_back(partial);
  const Evaluator only_values(of, values, Basis::mass, BeyondValidity::compute);
  const Evaluator with_partials(of, both, Basis::mass, BeyondValidity::compute);
  for (auto _ : state) {
    JetTile jet;
    ColumnTile out;
    const double one_jet = seconds([&] {
      of->model->jets(Order::second, kTile, states.T, states.rho, kPure, jet);
      benchmark::DoNotOptimize(jet);
    });
    const double solve = seconds([&] { solveStates(*of, kPure, BeyondValidity::compute, input, states); });
    const double solve_saturated =
        seconds([&] { solveStates(*of, kPure, BeyondValidity::compute, saturated, states); });
    const double value = seconds([&] { only_values.evaluate(input, kPure, out); });
    const double partial = seconds([&] { with_partials.evaluate(input, kPure, out); });
    solveStates(*of, kPure, BeyondValidity::compute, input, states);
    state.SetIterationTime(partial);
    state.counters["jet_ns"] = 1e9 * one_jet / kTile;
    state.counters["Tp_solve_to_jet"] = solve / one_jet;
    state.counters["saturation_to_jet"] = solve_saturated / one_jet;
    state.counters["values_ns"] = 1e9 * value / kTile;
    state.counters["10_partials_to_values"] = partial / value;
  }
}
BENCHMARK_CAPTURE(statesAndColumns, water, "water")->UseManualTime()->Iterations(3);
BENCHMARK_CAPTURE(statesAndColumns, propane, "propane")->UseManualTime()->Iterations(3);

/// (dh/dp)_T of compressed liquid water: analytic against central differences of (T,p) states, in cost and in
/// true digits.
void againstDifferences(benchmark::State& state) {
  const auto water = candidate("water");
  const auto& reference = library().references()[*(*library().find("water"))->reference];
  oracle::Fluid truth(oracle::referenceResidual(reference.equation), {{reference.ideal, 1.0}},
                      reference.equation.R);
  const auto want = columns({"h", "(dh/dp)_T"});
  const Evaluator evaluator(water, want, Basis::molar, BeyondValidity::compute);
  const auto enthalpy = columns({"h"});
  const Evaluator values(water, enthalpy, Basis::molar, BeyondValidity::compute);
  InputTile input;
  input.count = kTile;
  for (int k = 0; k < kTile; ++k) {
    input.first[k] = 300 + 2.0 * k;
    input.second[k] = 20e6;
  }
  StateTile states;
  solveStates(*water, kPure, BeyondValidity::compute, input, states);
  std::array<double, kTile> exact;
  for (int k = 0; k < kTile; ++k) {
    const auto bases = truth.bases(oracle::Real(states.T[k]), oracle::Real(states.rho[k]));
    exact[static_cast<std::size_t>(k)] =
        static_cast<double>(oracle::partial(bases, Base::h, Base::p, Base::T).value);
  }
  ColumnTile out;
  ColumnTile up;
  ColumnTile down;
  const auto worst = [&](const auto& value) {
    double error = 0;
    for (int k = 0; k < kTile; ++k)
      error = std::max(error, std::abs(value(k) / exact[static_cast<std::size_t>(k)] - 1));
    return error;
  };
  const auto difference = [&](double step) {
    InputTile higher = input;
    InputTile lower = input;
    for (int k = 0; k < kTile; ++k) {
      higher.second[k] *= 1 + step;
      lower.second[k] *= 1 - step;
    }
    values.evaluate(higher, kPure, up);
    values.evaluate(lower, kPure, down);
    return worst([&](int k) {
      return (up.columns.value[0][k] - down.columns.value[0][k]) / (higher.second[k] - lower.second[k]);
    });
  };
  for (auto _ : state) {
    const double analytic = seconds([&] { evaluator.evaluate(input, kPure, out); });
    const double value = seconds([&] { values.evaluate(input, kPure, out); });
    const double differenced = seconds([&] { benchmark::DoNotOptimize(difference(1e-4)); }) + value;
    evaluator.evaluate(input, kPure, out);
    double best = 1;
    for (double step = 1e-2; step > 1e-9; step /= 2) best = std::min(best, difference(step));
    state.SetIterationTime(analytic);
    state.counters["cost_of_differences"] = differenced / analytic;
    state.counters["error_analytic"] = worst([&](int k) { return out.columns.value[1][k]; });
    state.counters["error_best_step"] = best;
    state.counters["error_step_1e-6"] = difference(1e-6);
  }
}
BENCHMARK(againstDifferences)->UseManualTime()->Iterations(3);

}  // namespace
}  // namespace holdfast::thermo

BENCHMARK_MAIN();
