// What is known about fluids: the data of thermo/fluids/data (FORMAT.md there says how it is written), read
// once into plain structs. Nothing here computes.
#pragma once

#include <array>
#include <filesystem>
#include <map>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "thermo/fluids/equation_data.hpp"
#include "thermo/result.hpp"

namespace holdfast::thermo {

/// A printed check state. Quantities that the source does not print are empty.
struct CheckState {
  std::string source;
  double T = 0;                              ///< K
  double rho = 0;                            ///< mol/m3
  std::optional<double> p, cv, cp, w, h, s;  ///< Pa, J/(mol K), J/(mol K), m/s, J/mol, J/(mol K)
};

/// One file of data/reference.
struct ReferenceFluid {
  std::string file;  ///< stem: "propane"
  std::string designation, name, formula, cas;
  double M = 0;                                             ///< kg/mol
  double T_from = 0, T_up_to = 0, p_up_to = 0;              ///< validity; K, Pa
  double T_critical = 0, p_critical = 0, rho_critical = 0;  ///< printed; starting values only
  std::optional<double> T_triple, p_triple;
  std::optional<double> T_boil;  ///< K at 101325 Pa
  ReferenceEquationData equation;
  IdealHeatCapacity ideal;
  std::string ideal_source;
  std::vector<CheckState> checks;
  std::string evidence;  ///< its row of EVIDENCE.md, for people
};

/// One row of catalogue.csv with what other tables add to it.
struct Fluid {
  std::string designation;  ///< ISO 817: "R-290"; empty where there is none
  std::string name, formula, cas;
  double M = 0;                           ///< kg/mol; of the reference file where there is one
  double T_critical = 0, p_critical = 0;  ///< K, Pa: of the catalogue, for the cubic equations
  std::optional<double> acentric_factor;  ///< of the catalogue; none: no cubic equation
  std::optional<double> T_boil, T_melt;   ///< K
  std::string safety_class;               ///< "A1", "B2L", ... or as the catalogue says
  std::optional<double> gwp100;
  std::string gwp_source;
  std::optional<double> odp;
  std::string caution;  ///< "flammable; high pressure"
  std::string source, flag;
  std::optional<IdealHeatCapacity> ideal;  ///< of cp0.csv, or of the reference file
  std::string ideal_source;
  std::optional<std::size_t> reference;  ///< index into FluidLibrary::references()

  /// The designation, or the chemical name where there is none: how the rest of the house names it.
  const std::string& label() const { return designation.empty() ? name : designation; }
};

/// A binary interaction of Peng-Robinson.
struct BinaryInteraction {
  double kij = 0;
  std::string
      kind;  ///< "published, from memory", "common practice", "regressed", or "prediction" (none known: 0)
  std::string source;
};

/// A designated blend of blends.csv.
struct Blend {
  std::string designation;
  std::string kind;                     ///< "zeotrope", "azeotrope", ...
  std::vector<std::string> components;  ///< designations
  std::vector<double> mass_fractions;   ///< sum 1
  std::string safety_class;
  std::optional<double> T_bubble, T_dew;  ///< K at 101325 Pa, printed
  std::string source, flag;
};

/// Everything that was read. Immutable after load.
class FluidLibrary {
 public:
  /// Reads all files below `folder`. The error names file, line and field.
  static Result<FluidLibrary> load(const std::filesystem::path& folder);

  /// Where the data is: $HOLDFAST_FLUIDS, else installed beside the program, else the build tree's, else the
  /// folder of the configured install prefix.
  static Result<std::filesystem::path> findFolder();

  const std::vector<Fluid>& fluids() const { return fluids_; }
  const std::vector<ReferenceFluid>& references() const { return references_; }
  const std::vector<Blend>& blends() const { return blends_; }

  /// A fluid by designation, chemical name (with or without what stands in brackets after it), CAS number or
  /// reference file stem; letter case and blanks do not matter. The error suggests the nearest spelling:
  /// unknown fluid "R-29O" (did you mean "R-290"?)
  Result<const Fluid*> find(std::string_view name) const;
  /// A designated blend; nullptr if there is none of this name.
  const Blend* findBlend(std::string_view designation) const;

  /// Peng-Robinson kij of two fluids, either order; kind "prediction" and 0 where none is known.
  BinaryInteraction interaction(const Fluid& first, const Fluid& second) const;

  /// 64 hexadecimal digits: SHA-256 over the names and bytes of all data files in name order.
  const std::string& digest() const { return digest_; }

 private:
  std::vector<Fluid> fluids_;
  std::vector<ReferenceFluid> references_;
  std::vector<Blend> blends_;
  std::map<std::pair<std::string, std::string>, BinaryInteraction> interactions_;
  std::string digest_;
};

}  // namespace holdfast::thermo
