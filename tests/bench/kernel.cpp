// The kernel: a jet of water against two yardsticks measured in the same run: the exp floor (states x terms x
// one vector exp) and the textbook way (scalar, a pow() or exp() a term).
#define HOLDFAST_VARIANT bench
#include <benchmark/benchmark.h>

#include <algorithm>
#include <chrono>
#include <cmath>
#include <functional>
#include <string>

#include "thermo/equations/kernel.hpp"
#include "thermo/equations/reference.hpp"
#include "thermo/equations/vector_math.hpp"
#include "thermo/fluids/library.hpp"

namespace holdfast::thermo {
namespace {

const ReferenceFluid& fluid(const std::string& file) {
  static const Result<FluidLibrary> library = FluidLibrary::load(*FluidLibrary::findFolder());
  for (const auto& reference : library->references())
    if (reference.file == file) return reference;
  std::abort();
}

struct States {
  Row T, rho;
};

States statesOf(const ReferenceFluid& of) {
  States out;
  for (int k = 0; k < kTile; ++k) {
    out.T[k] = of.T_critical * (0.7 + 0.01 * k);
    out.rho[k] = of.rho_critical * (0.05 + 0.04 * k);
  }
  return out;
}

double seconds(const std::function<void()>& work) {
  // The least of a few repetitions: what the machine can do when left alone.
  double least = 1e9;
  for (int round = 0; round < 7; ++round) {
    const auto start = std::chrono::steady_clock::now();
    for (int k = 0; k < 300; ++k) work();
    least = std::min(least,
                     std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count() / 300);
  }
  return least;
}

double jetSeconds(const ReferenceFluid& of, Order order) {
  const ReferenceEquation equation(of.equation);
  const States states = statesOf(of);
  ResidualTile rows;
  return seconds([&] {
    equation.residual(order, {kTile, &states.T, &states.rho, nullptr}, rows);
    benchmark::DoNotOptimize(rows);
  });
}

std::size_t termsOf(const ReferenceEquationData& data) {
  return data.plain.size() + data.damped.size() + data.double_damped.size() + data.bell.size() +
         data.inverse_bell.size() + data.nonanalytic.size();
}

double expFloorSeconds(const ReferenceFluid& of) {
  const std::size_t terms = termsOf(of.equation);
  Row x;
  for (int k = 0; k < kTile; ++k) x[k] = -0.01 * k;
  return seconds([&] {
    for (std::size_t term = 0; term < terms; ++term)
      for (int k = 0; k < kTile; k += bench::kWidth) {
        bench::V y = bench::exp(bench::load(x.data() + k));
        benchmark::DoNotOptimize(y);
      }
  });
}

/// The way of a textbook: each term by pow and exp, each derivative by its formula (plain and damped terms,
/// second order).
double textbookSeconds(const ReferenceFluid& of) {
  const States states = statesOf(of);
  return seconds([&] {
    for (int k = 0; k < kTile; ++k) {
      const double tau = of.equation.scale_T / states.T[k];
      const double delta = states.rho[k] / of.equation.scale_rho;
      double a = 0, d = 0, t = 0, dd = 0, dt = 0, tt = 0;
      for (const auto& term : of.equation.plain) {
        const double m = term.n * std::pow(delta, term.d) * std::pow(tau, term.t);
        a += m, d += term.d * m, t += term.t * m, dd += term.d * term.d * m, dt += term.d * term.t * m,
            tt += term.t * term.t * m;
      }
      for (const auto& term : of.equation.damped) {
        const double c = std::pow(delta, term.c);
        const double m = term.n * std::pow(delta, term.d) * std::pow(tau, term.t) * std::exp(-c);
        const double by_d = term.d - term.c * c;
        a += m, d += by_d * m, t += term.t * m, dd += (by_d * by_d - term.c * term.c * c) * m,
            dt += by_d * term.t * m, tt += term.t * term.t * m;
      }
      benchmark::DoNotOptimize(a + d + t + dd + dt + tt);
    }
  });
}

void jet(benchmark::State& state, const char* file) {
  const ReferenceFluid& of = fluid(file);
  for (auto _ : state) {
    const double jet = jetSeconds(of, Order::second);
    const double floor = expFloorSeconds(of);
    state.SetIterationTime(jet);
    state.counters["ns_a_state"] = 1e9 * jet / kTile;
    state.counters["to_exp_floor"] = jet / floor;
    state.counters["textbook_to_jet"] = textbookSeconds(of) / jet;
    state.counters["order0_to_2"] = jetSeconds(of, Order::zeroth) / jet;
    state.counters["order1_to_2"] = jetSeconds(of, Order::first) / jet;
    state.counters["order3_to_2"] = jetSeconds(of, Order::third) / jet;
  }
  state.SetLabel(std::string(kernels().name));
}
BENCHMARK_CAPTURE(jet, water, "water")->UseManualTime()->Iterations(3);
BENCHMARK_CAPTURE(jet, propane, "propane")->UseManualTime()->Iterations(3);
BENCHMARK_CAPTURE(jet, carbon_dioxide, "carbon-dioxide")->UseManualTime()->Iterations(3);
BENCHMARK_CAPTURE(jet, r134a, "r-134a")->UseManualTime()->Iterations(3);

}  // namespace
}  // namespace holdfast::thermo

BENCHMARK_MAIN();
