// `holdfast fluids [NAME]`: what is known of fluids, and how well.
#include <algorithm>
#include <cstdio>
#include <iostream>
#include <memory>
#include <string>

#include "coordinator/program/commands.hpp"
#include "coordinator/program/data.hpp"
#include "thermo/equilibrium/candidate.hpp"

namespace holdfast::coordinator {
namespace {

using thermo::Fluid;

constexpr const char* kDefer =
    "Cautions and classes are reminders from a catalogue: local codes and licensed practice decide.\n";

std::string number(double value, const char* unit) {
  std::array<char, 64> text{};
  std::snprintf(text.data(), text.size(), "%.7g%s%s", value, *unit == '\0' ? "" : " ", unit);
  return text.data();
}

void line(const std::string& name, const std::string& value) {
  if (!value.empty()) std::printf("  %-22s %s\n", name.c_str(), value.c_str());
}

std::string orNothing(const std::optional<double>& value, const char* unit) {
  return value ? number(*value, unit) : "";
}

void list(const thermo::FluidLibrary& library) {
  std::printf("%-14s %-44s %-12s %-7s %-10s %s\n", "designation", "name", "CAS", "class", "GWP100",
              "equations");
  for (const Fluid& fluid : library.fluids()) {
    std::string equations = fluid.reference ? "reference" : "";
    if (fluid.acentric_factor) equations += std::string(equations.empty() ? "" : ", ") + "cubic";
    std::printf("%-14s %-44s %-12s %-7s %-10s %s\n", fluid.designation.c_str(), fluid.name.c_str(),
                fluid.cas.c_str(), fluid.safety_class.c_str(),
                fluid.gwp100 ? number(*fluid.gwp100, "").c_str() : "", equations.c_str());
  }
  std::printf("\nblends (by mass):");
  for (std::size_t k = 0; k < library.blends().size(); ++k)
    std::printf("%s%s", k % 10 == 0 ? "\n  " : ", ", library.blends()[k].designation.c_str());
  std::printf("\n\n%s", kDefer);
}

void show(const Fluid& fluid, const thermo::FluidLibrary& library) {
  std::printf("%s\n", fluid.label().c_str());
  line("name", fluid.name);
  line("formula", fluid.formula);
  line("CAS number", fluid.cas);
  line("molar mass", number(fluid.M, "kg/mol"));
  line("critical point", number(fluid.T_critical, "K") + ", " + number(fluid.p_critical, "Pa") +
                             " (catalogue; used by the cubic equations)");
  line("acentric factor", orNothing(fluid.acentric_factor, ""));
  line("boils at 101325 Pa", orNothing(fluid.T_boil, "K"));
  line("melts", orNothing(fluid.T_melt, "K"));
  line("constants from", fluid.source);
  line("remark", fluid.flag);
  line("safety class", fluid.safety_class.empty() ? "not classified" : fluid.safety_class + " (ISO 817)");
  line("GWP, 100 years",
       fluid.gwp100 ? number(*fluid.gwp100, "") + " (" + fluid.gwp_source + ")" : "not assessed");
  line("ODP", orNothing(fluid.odp, ""));
  line("CAUTION", fluid.caution.empty() ? "none recorded, which is no assurance" : fluid.caution);
  if (fluid.reference) {
    const thermo::ReferenceFluid& reference = library.references()[*fluid.reference];
    std::printf("equation \"reference\"\n");
    line("source", reference.equation.source);
    line("stated range", number(reference.T_from, "K") + " to " + number(reference.T_up_to, "K") +
                             ", up to " + number(reference.p_up_to, "Pa"));
    line("ideal part", reference.ideal_source);
    line("evidence", reference.evidence);
    // What the equation itself says, as far as it differs from what is printed.
    thermo::CandidateSpec spec;
    spec.components = {fluid.label()};
    if (const auto candidate = thermo::makeCandidate(library, spec); candidate.ok()) {
      const thermo::CriticalPoint& critical = (*candidate)->model->component(0).critical;
      line("its critical point",
           number(critical.T, "K") + ", " + number(critical.p, "Pa") + ", " + number(critical.rho, "mol/m3"));
      const thermo::ReferenceUsed& used = (*candidate)->reference_used[0];
      line("h and s fixed at", used.state + ", " + number(used.T, "K") + ": " + number(used.h, "J/kg") +
                                   ", " + number(used.s, "J/(kg K)"));
    }
  }
  if (fluid.acentric_factor) {
    std::printf("equations \"peng-robinson\", \"soave\"\n");
    line("sources",
         "Peng, Robinson, Ind. Eng. Chem. Fundam. 15 (1976) 59; Soave, Chem. Eng. Sci. 27 (1972) 1197");
    line("ideal part", fluid.ideal_source);
  }
  std::printf("%s", kDefer);
}

void show(const thermo::Blend& blend, const thermo::FluidLibrary& library) {
  std::printf("%s (%s)\n", blend.designation.c_str(), blend.kind.c_str());
  for (std::size_t i = 0; i < blend.components.size(); ++i)
    line(blend.components[i], number(100 * blend.mass_fractions[i], "% by mass"));
  line("safety class", blend.safety_class + " (ISO 817)");
  line("bubble point", orNothing(blend.T_bubble, "K at 101325 Pa (printed)"));
  line("dew point", orNothing(blend.T_dew, "K at 101325 Pa (printed)"));
  line("source", blend.source);
  line("remark", blend.flag);
  std::printf("interactions of \"peng-robinson\"\n");
  for (std::size_t i = 0; i < blend.components.size(); ++i)
    for (std::size_t j = 0; j < i; ++j) {
      const auto first = library.find(blend.components[j]);
      const auto second = library.find(blend.components[i]);
      if (!first.ok() || !second.ok()) continue;
      const thermo::BinaryInteraction pair = library.interaction(**first, **second);
      line(blend.components[j] + "/" + blend.components[i],
           "kij = " + number(pair.kij, "") + ", " + pair.kind + "; " + pair.source);
    }
  for (const std::string& component : blend.components)
    if (const auto fluid = library.find(component); fluid.ok())
      line("CAUTION " + component, (*fluid)->caution);
  std::printf("%s", kDefer);
}

int fluids(const std::string& name) {
  const auto library = loadData();
  if (!library.ok()) {
    std::cerr << library.error().message << "\n";
    return 1;
  }
  if (name.empty()) {
    list(**library);
    return 0;
  }
  if (const thermo::Blend* blend = (*library)->findBlend(name)) {
    show(*blend, **library);
    return 0;
  }
  const auto fluid = (*library)->find(name);
  if (!fluid.ok()) {
    std::cerr << fluid.error().message << "\n";
    return 2;
  }
  show(**fluid, **library);
  return 0;
}

}  // namespace

void addFluidsCommand(CLI::App& app, int& exit_status) {
  auto name = std::make_shared<std::string>();
  CLI::App* command =
      app.add_subcommand("fluids", "what is known of fluids and blends, its sources, range and cautions");
  command->add_option("name", *name, "designation, chemical name or CAS number; all in short if not given");
  command->callback([name, &exit_status] { exit_status = fluids(*name); });
}

}  // namespace holdfast::coordinator
