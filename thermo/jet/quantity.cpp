#include "thermo/jet/quantity.hpp"

#include <array>

namespace holdfast::thermo {

namespace {

constexpr std::array<QuantityText, 22> kTexts = {{
    {"T", "temperature", "K", "K"},
    {"p", "pressure", "Pa", "Pa"},
    {"v", "specific volume", "m3 kg-1", "m3 mol-1"},
    {"rho", "density", "kg m-3", "mol m-3"},
    {"u", "internal energy", "J kg-1", "J mol-1"},
    {"h", "enthalpy", "J kg-1", "J mol-1"},
    {"s", "entropy", "J kg-1 K-1", "J mol-1 K-1"},
    {"a", "Helmholtz energy", "J kg-1", "J mol-1"},
    {"g", "Gibbs energy", "J kg-1", "J mol-1"},
    {"cv", "heat capacity at constant volume", "J kg-1 K-1", "J mol-1 K-1"},
    {"cp", "heat capacity at constant pressure", "J kg-1 K-1", "J mol-1 K-1"},
    {"w", "speed of sound", "m s-1", "m s-1"},
    {"Z", "compressibility factor p v/(R T)", "1", "1"},
    {"beta", "molar vapour fraction", "1", "1"},
    {"mu_JT", "Joule-Thomson coefficient (dT/dp)_h", "K Pa-1", "K Pa-1"},
    {"alpha_v", "volume expansivity (1/v)(dv/dT)_p", "K-1", "K-1"},
    {"kappa_T", "isothermal compressibility -(1/v)(dv/dp)_T", "Pa-1", "Pa-1"},
    {"kappa_s", "isentropic compressibility -(1/v)(dv/dp)_s", "Pa-1", "Pa-1"},
    {"M", "molar mass", "kg mol-1", "kg mol-1"},
    {"x", "mole fraction in the liquid", "1", "1"},
    {"y", "mole fraction in the vapour", "1", "1"},
    {"z", "overall mole fraction", "1", "1"},
}};

}  // namespace

const QuantityText& textOf(Quantity quantity) {
  return kTexts[static_cast<std::size_t>(quantity)];
}

std::optional<Quantity> quantityOf(std::string_view symbol) {
  for (std::size_t k = 0; k < kTexts.size(); ++k)
    if (kTexts[k].symbol == symbol) return static_cast<Quantity>(k);
  return std::nullopt;
}

}  // namespace holdfast::thermo
