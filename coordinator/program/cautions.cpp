#include "coordinator/program/cautions.hpp"

#include <map>
#include <set>
#include <sstream>

namespace holdfast::coordinator {

std::string cautionsOf(std::span<const std::string> components, const thermo::FluidLibrary& library) {
  std::map<std::string, std::set<std::string>> fluids_by_caution;
  for (const std::string& component : components) {
    const auto fluid = library.find(component);
    if (!fluid.ok()) continue;
    std::istringstream cautions((*fluid)->caution);
    for (std::string caution; std::getline(cautions, caution, ';');) {
      caution.erase(0, caution.find_first_not_of(' '));
      if (!caution.empty()) fluids_by_caution[caution].insert((*fluid)->label());
    }
  }
  if (fluids_by_caution.empty()) return {};
  std::string text = "CAUTION\n";
  for (const auto& [caution, fluids] : fluids_by_caution) {
    text.append("  ").append(caution).append(": ");
    std::string list;
    for (const std::string& fluid : fluids) list.append(list.empty() ? "" : ", ").append(fluid);
    text.append(list).append("\n");
  }
  return text + "  Numbers alone do not make a plant safe: local codes and licensed practice decide.\n";
}

}  // namespace holdfast::coordinator
