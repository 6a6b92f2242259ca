#include "thermo/state.hpp"

namespace holdfast::thermo {

std::string_view nameOf(Phase phase) {
  switch (phase) {
    case Phase::none:
      return "";
    case Phase::liquid:
      return "liquid";
    case Phase::vapour:
      return "vapour";
    case Phase::two_phase:
      return "two-phase";
    case Phase::supercritical:
      return "supercritical";
  }
  return "";
}

std::string_view nameOf(Outcome outcome) {
  switch (outcome) {
    case Outcome::ok:
      return "ok";
    case Outcome::extrapolated:
      return "extrapolated";
    case Outcome::out_of_range:
      return "out_of_range";
    case Outcome::solid:
      return "solid";
    case Outcome::splits:
      return "splits";
    case Outcome::undefined:
      return "undefined";
    case Outcome::no_convergence:
      return "no_convergence";
    case Outcome::crashed:
      return "crashed";
  }
  return "";
}

std::string_view meaningOf(Outcome outcome) {
  switch (outcome) {
    case Outcome::ok:
      return "computed, inside the stated validity of the equation";
    case Outcome::extrapolated:
      return "computed, beyond the stated validity of the equation: not covered by its authors";
    case Outcome::out_of_range:
      return "not computed: beyond a limit of the equation or of the study";
    case Outcome::solid:
      return "not computed: the substance is solid there";
    case Outcome::splits:
      return "not computed: one phase was asked for, two are stable";
    case Outcome::undefined:
      return "no such state exists";
    case Outcome::no_convergence:
      return "the solver did not converge";
    case Outcome::crashed:
      return "not computed: computing this point ended worker after worker";
  }
  return "";
}

std::string_view nameOf(InputPair pair) {
  switch (pair) {
    case InputPair::T_p:
      return "(T,p)";
    case InputPair::T_rho:
      return "(T,rho)";
    case InputPair::T_beta:
      return "(T,beta)";
    case InputPair::p_beta:
      return "(p,beta)";
  }
  return "";
}

std::string_view sentenceOf(Reason reason) {
  switch (reason) {
    case Reason::none:
      return "";
    case Reason::T_below_validity:
      return "the temperature is below the stated validity of the equation";
    case Reason::T_above_validity:
      return "the temperature is above the stated validity of the equation";
    case Reason::p_above_validity:
      return "the pressure is above the stated validity of the equation";
    case Reason::T_not_positive:
      return "the temperature is not positive";
    case Reason::p_not_positive:
      return "the pressure is not positive";
    case Reason::rho_not_positive:
      return "the density is not positive";
    case Reason::rho_too_high:
      return "the density is beyond what the equation can express";
    case Reason::beta_outside_0_1:
      return "the vapour fraction is outside 0 to 1";
    case Reason::no_saturation_at_T:
      return "there is no saturated state at this temperature";
    case Reason::no_saturation_at_p:
      return "there is no saturated state at this pressure";
    case Reason::unstable_blend:
      return "the blend splits into two phases there";
    case Reason::two_phase_blend:
      return "two-phase states of blends are not available";
    case Reason::solver_failed:
      return "the solver did not converge";
  }
  return "";
}

}  // namespace holdfast::thermo
