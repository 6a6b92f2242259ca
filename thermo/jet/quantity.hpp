// The property columns: names, units and meanings. Which of them a state has, and from what they are
// computed: columns.hpp.
#pragma once

#include <optional>
#include <string>
#include <string_view>

#include "thermo/jet/gradients.hpp"

namespace holdfast::thermo {

/// Every property holdfast writes, in the trade's symbols. The first nine are the base quantities, in the
/// order of Base.
enum class Quantity {
  T,
  p,
  v,
  rho,
  u,
  h,
  s,
  a,
  g,
  cv,
  cp,
  w,
  Z,
  beta,
  mu_JT,
  alpha_v,
  kappa_T,
  kappa_s,
  M,
  x,
  y,
  z,  ///< mole fraction of one component: liquid, vapour, overall
};

/// Of every specific quantity: per mass or per mole.
enum class Basis { mass, molar };

/// What a person reads about a quantity.
struct QuantityText {
  std::string_view symbol;      ///< as written in a study: "mu_JT"
  std::string_view meaning;     ///< "Joule-Thomson coefficient"
  std::string_view unit_mass;   ///< UDUNITS-2 text in mass basis: "K/Pa", "J/(kg K)"; "1" if it has none
  std::string_view unit_molar;  ///< the same in molar basis
};
const QuantityText& textOf(Quantity quantity);

/// The quantity of a symbol ("rho"); composition symbols without their bracket ("x"). nullopt: no such
/// symbol.
std::optional<Quantity> quantityOf(std::string_view symbol);

}  // namespace holdfast::thermo
