#include "thermo/equilibrium/density.hpp"

#include <algorithm>
#include <cmath>

namespace holdfast::thermo {

namespace {

constexpr Composition kPure{1};
constexpr int kMostSteps = 100;

/// One lane's solve under way.
struct Search {
  bool open = false;
  double T = 0, p = 0;
  double low = 0, high = 0;
  double rho = 0;
};

/// What a converged point hands to its neighbour.
struct Known {
  bool there = false;
  Root root = Root::only;
  double T = 0, p = 0, rho = 0;
  double by_log_p = 0;  ///< d ln rho/d ln p at T
  double by_log_T = 0;  ///< d ln rho/d ln T at p
};

/// A first guess from the neighbour, or the given start where it is too far or of another root.
double startOf(const DensityInput& input, int point, const Known& known) {
  const double given = input.start[point];
  if (!known.there || known.root != input.root[static_cast<std::size_t>(point)]) return given;
  // A liquid's density is straight in p, a gas's in ln p.
  const double by_p = known.root == Root::liquid ? known.by_log_p * (input.p[point] / known.p - 1)
                                                 : known.by_log_p * std::log(input.p[point] / known.p);
  const double change = by_p + known.by_log_T * std::log(input.T[point] / known.T);
  if (!(std::abs(change) < 0.5)) return given;
  const double guess = known.rho * std::exp(change);
  return guess > input.from[point] && guess < input.up_to[point] ? guess : given;
}

}  // namespace

void solveDensity(const Model& model, const DensityInput& input, DensityTile& out) {
  const double R = model.gasConstant(kPure);
  const int stretch = (input.count + kLanes - 1) / kLanes;
  std::array<Search, kLanes> search;
  std::array<Known, kLanes> known;
  Row T;
  Row rho;
  ResidualTile r;
  out.steps = 0;
  for (int place = 0; place < stretch; ++place) {
    int open = 0;
    for (int lane = 0; lane < kLanes; ++lane) {
      Search& s = search[static_cast<std::size_t>(lane)];
      const int point = lane * stretch + place;
      s.open = point < input.count;
      if (!s.open) {
        // A lane without a point repeats the first one, harmlessly.
        T[lane] = input.T[0];
        rho[lane] = input.start[0];
        continue;
      }
      ++open;
      s = {true,
           input.T[point],
           input.p[point],
           input.from[point],
           input.up_to[point],
           startOf(input, point, known[static_cast<std::size_t>(lane)])};
      T[lane] = s.T;
      rho[lane] = s.rho;
      out.converged[static_cast<std::size_t>(point)] = false;
    }
    for (int step = 0; step < kMostSteps && open > 0; ++step) {
      model.equation().residual(Order::second, {kLanes, &T, &rho, nullptr}, r);
      for (int lane = 0; lane < kLanes; ++lane) {
        Search& s = search[static_cast<std::size_t>(lane)];
        if (!s.open) continue;
        ++out.steps;
        const double q = s.rho * R * s.T;
        const double pressure = 1 + r[r10][lane];              // p/(rho R T)
        const double slope = 1 + r[r10][lane] + r[r20][lane];  // rho (dp/drho)_T/(rho R T)
        const double missing = s.p / q - pressure;
        (missing > 0 ? s.low : s.high) = s.rho;
        const double change = missing / slope;
        double next = s.rho * (1 + change);
        // The step after one of 1e-9 is below rounding, unless the slope is nearly flat; |missing| of 4e-15
        // is rounding itself.
        bool done =
            slope > 0 && (std::abs(change) <= 1e-9 * std::min(1.0, slope) || std::abs(missing) <= 4e-15);
        if (!(next >= s.low && next <= s.high) || !(slope > 0)) {
          done = s.high - s.low <= 1e-15 * s.high;
          next = s.low > 0 && s.high > 4 * s.low ? std::sqrt(s.low * s.high) : 0.5 * (s.low + s.high);
        }
        s.rho = next;
        rho[lane] = next;
        if (!done) continue;
        s.open = false;
        --open;
        const int point = lane * stretch + place;
        out.rho[point] = next;
        out.converged[static_cast<std::size_t>(point)] = true;
        known[static_cast<std::size_t>(lane)] = {true,
                                                 input.root[static_cast<std::size_t>(point)],
                                                 s.T,
                                                 s.p,
                                                 next,
                                                 pressure / slope,
                                                 -(pressure - r[r11][lane]) / slope};
      }
    }
    for (int lane = 0; lane < kLanes; ++lane) {
      if (!search[static_cast<std::size_t>(lane)].open) continue;
      out.rho[lane * stretch + place] = input.start[lane * stretch + place];
      known[static_cast<std::size_t>(lane)].there = false;
    }
  }
}

}  // namespace holdfast::thermo
