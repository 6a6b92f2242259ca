// Words for a state: how it is specified, what phase it is in, and what became of it.
#pragma once

#include <array>
#include <cstdint>
#include <optional>
#include <string_view>

#include "thermo/tile.hpp"

namespace holdfast::thermo {

/// How a state is given. Beta is the molar vapour fraction, 0..1.
enum class InputPair { T_p, T_rho, T_beta, p_beta };

/// The phase of a state. Codes are those of the store's table `phase` (0 = not known, stored as NULL).
enum class Phase : std::uint8_t { none = 0, liquid = 1, vapour = 2, two_phase = 3, supercritical = 4 };

/// What became of a point. Codes are those of the store's table `outcome`. A point has numbers if it is ok or
/// extrapolated.
enum class Outcome : std::uint8_t {
  ok = 0,
  extrapolated = 1,  ///< beyond the stated validity of the equation; computed all the same
  out_of_range = 2,  ///< a limit that the state cannot cross (which one: see Limit)
  solid = 3,
  splits = 4,     ///< one phase was asked for, two are stable
  undefined = 5,  ///< the specification has no state (beta beyond the critical point, ...)
  no_convergence = 6,
  crashed = 7,  ///< set by the coordinator: computing it killed worker after worker
};
inline constexpr int kOutcomes = 8;

std::string_view nameOf(Phase phase);      ///< "liquid", "vapour", "two-phase", "supercritical", "" for none
std::string_view nameOf(Outcome outcome);  ///< as in the store
std::string_view meaningOf(Outcome outcome);
std::string_view nameOf(InputPair pair);  ///< "(T,p)" ...

/// Which limit or reason stands behind an outcome other than ok.
enum class Reason : std::uint8_t {
  none = 0,
  T_below_validity,
  T_above_validity,
  p_above_validity,
  T_not_positive,
  p_not_positive,
  rho_not_positive,
  rho_too_high,
  beta_outside_0_1,
  no_saturation_at_T,  ///< T at or above the critical temperature, or below the triple point
  no_saturation_at_p,  ///< p at or above the critical pressure, or below the triple-point pressure
  unstable_blend,      ///< tangent plane below: the blend splits
  two_phase_blend,     ///< a two-phase state of a blend was asked for and cannot be answered yet
  solver_failed,
};
std::string_view sentenceOf(Reason reason);  ///< a sentence for people

/// Specifications of a tile of states.
struct InputTile {
  int count = 0;
  InputPair pair = InputPair::T_p;
  Row first;   ///< T in K, or p in Pa for p_beta
  Row second;  ///< p in Pa, rho in mol/m3, or beta
};

/// Solved states of a tile. Lanes whose outcome has no numbers hold harmless finite placeholders.
struct StateTile {
  int count = 0;
  Row T, p, rho;               ///< K, Pa, mol/m3 (overall density)
  Row beta;                    ///< molar vapour fraction; only where `saturated`
  Row rho_liquid, rho_vapour;  ///< saturated densities, mol/m3; only where `saturated`
  std::array<Phase, kTile> phase;
  std::array<Outcome, kTile> outcome;
  std::array<Reason, kTile> reason;
  std::array<bool, kTile>
      saturated;  ///< given by beta, or found inside the dome: both saturated phases are known

  bool hasNumbers(int k) const {
    const auto o = outcome[static_cast<std::size_t>(k)];
    return o == Outcome::ok || o == Outcome::extrapolated;
  }
};

}  // namespace holdfast::thermo
