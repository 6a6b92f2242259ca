#include "thermo/fluids/tables.hpp"

#include <algorithm>
#include <cmath>

namespace holdfast::thermo {

namespace {

std::vector<std::string> split(const std::string& text, char sign) {
  std::vector<std::string> parts;
  std::size_t from = 0;
  while (from <= text.size()) {
    const std::size_t to = std::min(text.find(sign, from), text.size());
    parts.push_back(text.substr(from, to - from));
    from = to + 1;
  }
  return parts;
}

/// "a:b;c:d" -> {{a,b},{c,d}}; the last colon of each part divides. Throws the Error of the field.
std::vector<std::pair<std::string, double>> pairs(const CsvTable& table, std::size_t row,
                                                  const std::string& column) {
  std::vector<std::pair<std::string, double>> out;
  if (table.text(row, column).empty()) return out;
  for (const std::string& part : split(table.text(row, column), ';')) {
    const std::size_t colon = part.rfind(':');
    const auto value = colon == std::string::npos ? std::nullopt : wholeNumber(part.substr(colon + 1));
    if (!value) throw table.fault(row, column, "\"" + part + "\" is not of the form name:number");
    out.emplace_back(part.substr(0, colon), *value);
  }
  return out;
}

template <class T>
T orThrow(Result<T> result) {
  if (!result) throw result.error();
  return std::move(result).value();
}

double positive(const CsvTable& table, std::size_t row, const std::string& column) {
  const double value = orThrow(table.requiredNumber(row, column));
  if (!(value > 0)) throw table.fault(row, column, "must be positive");
  return value;
}

constexpr double kPolynomialR = 8.31446261815324;  // J/(mol K); turns the polynomial's J/(mol K) into cp0/R

IdealHeatCapacity heatCapacity(const CsvTable& table, std::size_t row) {
  IdealHeatCapacity out;
  const std::string& form = table.text(row, "form");
  if (form == "einstein") {
    out.c0 = orThrow(table.requiredNumber(row, "c0"));
    for (const auto& [c, e] : pairs(table, row, "power_c:e")) {
      const auto coefficient = wholeNumber(c);
      if (!coefficient) throw table.fault(row, "power_c:e", "\"" + c + "\" is not a number");
      out.power.push_back({*coefficient, e});
    }
    for (const auto& [v, u] : pairs(table, row, "einstein_v:u_K")) {
      const auto weight = wholeNumber(v);
      if (!weight) throw table.fault(row, "einstein_v:u_K", "\"" + v + "\" is not a number");
      out.einstein.push_back({*weight, u});
    }
  } else if (form == "polynomial") {
    const std::string column = "poly_a;b;c;d;e_J_per_molK";
    double exponent = 0;
    for (const std::string& part : split(table.text(row, column), ';')) {
      const auto coefficient = wholeNumber(part);
      if (!coefficient) throw table.fault(row, column, "\"" + part + "\" is not a number");
      if (exponent == 0)
        out.c0 = *coefficient / kPolynomialR;
      else
        out.power.push_back({*coefficient / kPolynomialR, exponent});
      exponent += 1;
    }
  } else {
    throw table.fault(row, "form", "\"" + form + "\" is neither \"einstein\" nor \"polynomial\"");
  }
  return out;
}

Fluid ofReference(const ReferenceFluid& reference, std::size_t index) {
  Fluid fluid;
  fluid.designation = reference.designation;
  fluid.name = reference.name;
  fluid.formula = reference.formula;
  fluid.cas = reference.cas;
  fluid.M = reference.M;
  fluid.T_critical = reference.T_critical;
  fluid.p_critical = reference.p_critical;
  fluid.T_boil = reference.T_boil;
  fluid.T_melt = reference.T_triple;
  fluid.gwp_source = "not assessed";
  fluid.caution = "not classified here: find out before use";
  fluid.source = reference.equation.source;
  fluid.ideal = reference.ideal;
  fluid.ideal_source = reference.ideal_source;
  fluid.reference = index;
  return fluid;
}

Fluid catalogueRow(const CsvTable& table, std::size_t row, const std::vector<ReferenceFluid>& references) {
  Fluid fluid;
  const std::string& file = table.text(row, "reference");
  if (!file.empty()) {
    const auto found =
        std::find_if(references.begin(), references.end(), [&](const auto& r) { return r.file == file; });
    if (found == references.end())
      throw table.fault(row, "reference", "there is no file reference/" + file + ".toml");
    fluid = ofReference(*found, static_cast<std::size_t>(found - references.begin()));
  }
  fluid.designation = table.text(row, "designation");
  fluid.name = table.text(row, "name");
  if (fluid.name.empty()) throw table.fault(row, "name", "is missing");
  fluid.formula = table.text(row, "formula");
  fluid.cas = table.text(row, "cas");
  if (!fluid.reference) fluid.M = positive(table, row, "M_kg_per_mol");
  fluid.T_critical = positive(table, row, "T_c_K");
  fluid.p_critical = positive(table, row, "p_c_Pa");
  fluid.acentric_factor = orThrow(table.requiredNumber(row, "acentric_factor"));
  if (const auto T = orThrow(table.number(row, "T_boil_K"))) fluid.T_boil = T;
  if (const auto T = orThrow(table.number(row, "T_melt_K"))) fluid.T_melt = T;
  fluid.safety_class = table.text(row, "safety_class");
  fluid.gwp100 = orThrow(table.number(row, "gwp100"));
  fluid.gwp_source = table.text(row, "gwp_source");
  fluid.odp = orThrow(table.number(row, "odp"));
  fluid.caution = table.text(row, "caution");
  fluid.source = table.text(row, "source");
  fluid.flag = table.text(row, "flag");
  return fluid;
}

/// The fluid of a row that gives a designation or, where there is none, a name.
const Fluid* named(const std::vector<Fluid>& fluids, const std::string& designation,
                   const std::string& name) {
  for (const Fluid& fluid : fluids)
    if (designation.empty() ? (fluid.designation.empty() && fluid.name == name)
                            : fluid.designation == designation)
      return &fluid;
  return nullptr;
}

/// Runs a reading that throws an Error at the first fault.
template <class Reading>
auto guarded(const Reading& reading) -> Result<decltype(reading())> {
  try {
    return reading();
  } catch (const Error& fault) {
    return fault;
  }
}

}  // namespace

const std::vector<std::string>& catalogueColumns() {
  static const std::vector<std::string> columns = {
      "designation",     "name",      "formula",  "cas",          "M_kg_per_mol", "T_c_K",      "p_c_Pa",
      "acentric_factor", "T_boil_K",  "T_melt_K", "safety_class", "gwp100",       "gwp_source", "odp",
      "caution",         "reference", "source",   "flag"};
  return columns;
}

const std::vector<std::string>& cp0Columns() {
  static const std::vector<std::string> columns = {
      "designation", "name", "form", "c0", "power_c:e", "einstein_v:u_K", "poly_a;b;c;d;e_J_per_molK",
      "source"};
  return columns;
}

const std::vector<std::string>& interactionColumns() {
  static const std::vector<std::string> columns = {"designation_1", "name_1", "designation_2", "name_2",
                                                   "eos",           "kij",    "kind",          "source"};
  return columns;
}

const std::vector<std::string>& blendColumns() {
  static const std::vector<std::string> columns = {"designation", "kind",    "mass_fractions", "safety_class",
                                                   "T_bubble_K",  "T_dew_K", "source",         "flag"};
  return columns;
}

Result<std::vector<Fluid>> joinFluids(const CsvTable& catalogue, const CsvTable& cp0,
                                      const std::vector<ReferenceFluid>& references) {
  return guarded([&] {
    std::vector<Fluid> fluids;
    std::vector<bool> named_by_row(references.size(), false);
    for (std::size_t row = 0; row < catalogue.rows(); ++row) {
      fluids.push_back(catalogueRow(catalogue, row, references));
      const Fluid& fluid = fluids.back();
      if (fluid.reference) named_by_row[*fluid.reference] = true;
      for (std::size_t other = 0; other + 1 < fluids.size(); ++other)
        if (fluids[other].label() == fluid.label())
          throw catalogue.fault(row, "designation", "\"" + fluid.label() + "\" stands twice");
    }
    for (std::size_t k = 0; k < references.size(); ++k)
      if (!named_by_row[k]) fluids.push_back(ofReference(references[k], k));
    for (std::size_t row = 0; row < cp0.rows(); ++row) {
      const std::string& designation = cp0.text(row, "designation");
      const std::string& name = cp0.text(row, "name");
      const Fluid* fluid = named(fluids, designation, name);
      if (fluid == nullptr)
        throw cp0.fault(row, "designation",
                        "\"" + (designation.empty() ? name : designation) + "\" is not in the catalogue");
      Fluid& target = fluids[static_cast<std::size_t>(fluid - fluids.data())];
      if (target.reference) continue;  // the reference file's own ideal part comes first
      target.ideal = heatCapacity(cp0, row);
      target.ideal_source = cp0.text(row, "source");
    }
    return fluids;
  });
}

Result<Interactions> readInteractions(const CsvTable& table, const std::vector<Fluid>& fluids) {
  return guarded([&] {
    Interactions out;
    for (std::size_t row = 0; row < table.rows(); ++row) {
      if (table.text(row, "eos") != "PR") throw table.fault(row, "eos", "only PR is known");
      std::array<std::string, 2> labels;
      for (std::size_t side = 0; side < 2; ++side) {
        const std::string tail = side == 0 ? "_1" : "_2";
        const std::string& designation = table.text(row, "designation" + tail);
        const Fluid* fluid = named(fluids, designation, table.text(row, "name" + tail));
        if (fluid == nullptr)
          throw table.fault(row, "designation" + tail, "\"" + designation + "\" is not in the catalogue");
        labels[side] = fluid->label();
      }
      std::sort(labels.begin(), labels.end());
      out[{labels[0], labels[1]}] = {orThrow(table.requiredNumber(row, "kij")), table.text(row, "kind"),
                                     table.text(row, "source")};
    }
    return out;
  });
}

Result<std::vector<Blend>> readBlends(const CsvTable& table, const std::vector<Fluid>& fluids) {
  return guarded([&] {
    std::vector<Blend> out;
    for (std::size_t row = 0; row < table.rows(); ++row) {
      Blend blend;
      blend.designation = table.text(row, "designation");
      blend.kind = table.text(row, "kind");
      double sum = 0;
      for (const auto& [component, fraction] : pairs(table, row, "mass_fractions")) {
        if (named(fluids, component, "") == nullptr)
          throw table.fault(row, "mass_fractions", "\"" + component + "\" is not in the catalogue");
        if (!(fraction > 0)) throw table.fault(row, "mass_fractions", "fractions must be positive");
        blend.components.push_back(component);
        blend.mass_fractions.push_back(fraction);
        sum += fraction;
      }
      if (std::abs(sum - 1) > 1e-6) throw table.fault(row, "mass_fractions", "the fractions do not sum to 1");
      for (double& fraction : blend.mass_fractions) fraction /= sum;
      blend.safety_class = table.text(row, "safety_class");
      blend.T_bubble = orThrow(table.number(row, "T_bubble_K"));
      blend.T_dew = orThrow(table.number(row, "T_dew_K"));
      blend.source = table.text(row, "source");
      blend.flag = table.text(row, "flag");
      out.push_back(std::move(blend));
    }
    return out;
  });
}

}  // namespace holdfast::thermo
